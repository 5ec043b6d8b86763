import { availableParallelism } from 'node:os';
import type { Command } from 'commander';
import {
  DEFAULT_ASSAY_OPTIONS,
  parseDilution,
  parseInUnits,
  parseLength,
  parseSide,
  parseTemperature,
  type OrdinateUnit,
  type Side,
} from '../index.ts';
import { loadCalibration } from './inputs.ts';
import { optionOf, tell } from './options.ts';
import { progressOn } from './progress.ts';
import type { SeriesJob, SeriesPiece, SeriesPieceResults } from './seriesChunk.ts';
import { outputTo, requireNewOutput, resumeFrom, type SeriesOutput } from './seriesOutput.ts';
import { runSeries, type SeriesSummary } from './seriesRun.ts';
import { SeriesFile, streamedSeries, type Bookmark, type Piece, type SeriesLayout } from './seriesSource.ts';
import { WorkerPool } from './workerPool.ts';

interface FollowOptions {
  calibration?: string;
  side: Side;
  path: number;
  pathUncertainty?: number;
  dilution: number;
  temperature?: number;
  unit: OrdinateUnit;
  jobs: number;
  out?: string;
  resume?: boolean;
  since?: number;
  wait?: boolean;
}

/** Threads beyond these cost memory and gain nothing while one thread reads the file. */
const MOST_JOBS = 4;
const INTERRUPTED = 130;

const whole = (option: string, least: number) =>
  optionOf(option, (text, where) => {
    const value = parseInUnits(text, 'a whole number', { '': 1 }, '2', where);
    return Math.max(least, Math.trunc(value));
  });

export function register(program: Command): void {
  const command = program
    .command('follow')
    .description('a long or growing series of spectra, one a line → state of charge of each, as NDJSON')
    .argument('<file>', 'wavelengths in a line, one spectrum a line below it (CSV), or NDJSON; - for standard input')
    .option(
      '--calibration <file>',
      'calibration; the shipped reference without it, then no result is better than caution',
    )
    .requiredOption('--side <side>', 'negative or positive', optionOf('--side', parseSide))
    .requiredOption('--path <length>', 'path of the cell, e.g. 1mm', optionOf('--path', parseLength))
    .option(
      '--path-uncertainty <length>',
      'standard uncertainty of the path, e.g. 0.01mm',
      optionOf('--path-uncertainty', parseLength),
    )
    .option('--dilution <factor>', 'tank over cuvette', optionOf('--dilution', parseDilution), 1)
    .option('--temperature <t>', 'of the cell, e.g. 25C', optionOf('--temperature', parseTemperature))
    .option('--unit <unit>', 'unit of the readings: A, mA, %T or T', 'A')
    .option('--jobs <n>', 'worker threads', whole('--jobs', 1), Math.min(MOST_JOBS, availableParallelism()))
    .option('--out <file>', 'file of results; standard output without it')
    .option('--resume', 'go on where the results in --out end')
    .option('--since <byte>', 'begin at this byte of the file, as printed when a run ends', whole('--since', 0))
    .option('--wait', 'at the end wait for more lines; stop with Ctrl-C')
    .action((file: string, options: FollowOptions) => run(command, file, options));
}

async function run(command: Command, file: string, options: FollowOptions): Promise<void> {
  refuseContradictions(command, file, options);
  const inUse = loadCalibration(options.calibration);
  if (options.out !== undefined)
    requireNewOutput(options.out, options.resume === true, options.calibration ? [file, options.calibration] : [file]);
  const job: SeriesJob = {
    inUse,
    cuvette: {
      side: options.side,
      pathLength: options.path,
      pathUncertainty: options.pathUncertainty ?? null,
      dilution: options.dilution,
      temperature: options.temperature ?? null,
    },
    options: { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
    unit: options.unit,
  };
  const stop = stopOnInterrupt();
  const source = await sourceOf(file, options, stop.asked);
  const output = outputTo(options.out, options.resume === true);
  const summary = await follow(source, job, options, output, stop.asked);
  await output.close();
  const left = await source.unfinished(summary.bookmark.byte);
  await source.close();
  stop.forget();
  report(summary, left, stop.interrupted() && options.wait !== true);
  if (summary.withheld > 0) process.exitCode = 4;
  if (stop.interrupted() && options.wait !== true) process.exitCode = INTERRUPTED;
}

function refuseContradictions(command: Command, file: string, options: FollowOptions): void {
  if (options.side === 'composite')
    command.error('expected --side negative or positive; a composite has no state of charge to follow');
  if (!['A', 'mA', '%T', 'T'].includes(options.unit))
    command.error(`expected --unit A, mA, %T or T; received ${options.unit}`);
  if (options.resume && options.out === undefined) command.error('expected --out with --resume, which goes on with it');
  if (options.resume && options.since !== undefined) command.error('expected --resume or --since; received both');
  if (file === '-' && (options.resume || options.since !== undefined || options.wait))
    command.error('expected a file on disk with --resume, --since or --wait; received standard input');
}

interface Source {
  readonly layout: SeriesLayout;
  readonly bookmark: Bookmark;
  readonly pieces: AsyncIterator<Piece>;
  /** present size in bytes; 0 where nobody knows */
  size(): Promise<number>;
  unfinished(byte: number): Promise<number>;
  close(): Promise<void>;
}

async function sourceOf(file: string, options: FollowOptions, stopped: () => boolean): Promise<Source> {
  const nothing = (): Promise<number> => Promise.resolve(0);
  if (file === '-') {
    const { layout, start, pieces } = await streamedSeries(process.stdin, 'standard input');
    return { layout, bookmark: start, pieces, size: nothing, unfinished: nothing, close: () => Promise.resolve() };
  }
  const series = await SeriesFile.open(file);
  const { layout, start } = await series.head();
  const resumed = options.resume ? await resumeFrom(options.out!) : null;
  const bookmark = resumed ?? (options.since === undefined ? start : await series.bookmarkAt(options.since));
  return {
    layout: bookmark.axisAt === start.axisAt ? layout : await series.layoutAt(bookmark.axisAt),
    bookmark,
    pieces: series.pieces(bookmark.byte, stopped, options.wait === true),
    size: () => series.size(),
    unfinished: (byte) => series.unfinished(byte),
    close: () => series.close(),
  };
}

async function follow(
  source: Source,
  job: SeriesJob,
  options: FollowOptions,
  output: SeriesOutput,
  stopped: () => boolean,
): Promise<SeriesSummary> {
  const pool = new WorkerPool<SeriesPiece, SeriesPieceResults>(
    new URL('./workerSeries.js', import.meta.url),
    options.jobs,
    job,
  );
  const size = await source.size();
  const progress = progressOn(process.stderr);
  try {
    return await runSeries(
      {
        next: () =>
          output.gone() || stopped() ? Promise.resolve({ done: true, value: undefined }) : source.pieces.next(),
      },
      { layout: source.layout, bookmark: source.bookmark },
      pool,
      options.jobs,
      {
        write: (text) => output.write(text),
        tell,
        reached: ({ byte, row }) => progress.show(`row ${row}`, size > 0 ? Math.min(1, byte / size) : 0),
      },
    );
  } finally {
    progress.stop();
    await pool.close();
  }
}

/** The first interrupt lets what is under way come to its end, the second does not wait for it. */
function stopOnInterrupt(): { asked: () => boolean; interrupted: () => boolean; forget: () => void } {
  let count = 0;
  const onSignal = (): void => {
    count += 1;
    if (count === 1) tell('stopping: what is under way is finished and written');
    else process.exit(INTERRUPTED);
  };
  process.on('SIGINT', onSignal);
  process.on('SIGTERM', onSignal);
  return {
    asked: () => count > 0,
    interrupted: () => count > 0,
    forget: () => {
      process.off('SIGINT', onSignal);
      process.off('SIGTERM', onSignal);
    },
  };
}

function report(summary: SeriesSummary, left: number, interrupted: boolean): void {
  const { bookmark, rows, sound, caution, withheld } = summary;
  tell(`${rows} rows: ${sound} sound, ${caution} with caution, ${withheld} withheld`);
  if (interrupted) tell('interrupted before the end');
  else if (left > 0) tell(`the last line is not finished (${left} bytes without a line end): it is left for next time`);
  tell(`go on with --since ${bookmark.byte}, or with --resume where --out was given`);
}
