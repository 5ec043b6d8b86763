import reference from '../../calibration/reference.json?raw';
import { Engine } from './engine.ts';
import type { Asked, Told } from './protocol.ts';

const engine = new Engine(reference);
// A worker has no origin to name, unlike a window.
// oxlint-disable-next-line unicorn/require-post-message-target-origin
const tell = (message: Told): void => self.postMessage(message);

// One after the other: a computation must see the files that were dropped before it.
let last: Promise<void> = Promise.resolve();

self.addEventListener('message', ({ data }: MessageEvent<Asked>) => {
  last = last.then(async () => {
    try {
      const answer = await engine.answer(data.name, data.body as never, (done) => tell({ id: data.id, done }));
      tell({ id: data.id, answer });
    } catch (error) {
      tell({ id: data.id, defect: error instanceof Error ? (error.stack ?? error.message) : String(error) });
    }
  });
});
