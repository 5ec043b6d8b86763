import { parentPort, workerData } from 'node:worker_threads';
import { seriesReader, type SeriesJob, type SeriesPiece } from './seriesChunk.ts';

// One thread of `follow`: pieces in, results out, in the order they come.
const read = seriesReader(workerData as SeriesJob);

parentPort!.on('message', (piece: SeriesPiece) => {
  const found = read(piece);
  const moved = [found.start, found.end, found.stateOfCharge, found.uncertainty, found.total, found.totalUncertainty];
  parentPort!.postMessage(
    found,
    moved.map((array) => array.buffer as ArrayBuffer),
  );
});
