import { once } from 'node:events';
import { createWriteStream, existsSync } from 'node:fs';
import { open } from 'node:fs/promises';
import type { Writable } from 'node:stream';
import { TankhueError } from '../errors.ts';
import { requireWritable } from '../io/files.ts';
import type { SeriesRecord } from '../report/seriesNdjson.ts';
import type { Bookmark } from './seriesSource.ts';

/** Lines out, one piece at a time. */
export interface SeriesOutput {
  write(text: string): Promise<void>;
  /** everything is written when it resolves */
  close(): Promise<void>;
  /** the reader has gone, as in `| head` */
  readonly gone: () => boolean;
}

export function outputTo(path: string | undefined, append: boolean): SeriesOutput {
  const stream: Writable =
    path === undefined ? process.stdout : createWriteStream(path, { flags: append ? 'a' : 'wx' });
  let failure: NodeJS.ErrnoException | null = null;
  stream.on('error', (error: NodeJS.ErrnoException) => (failure = error));
  const gone = (): boolean => failure?.code === 'EPIPE';
  const check = (): void => {
    if (failure === null || gone()) return;
    throw new TankhueError(
      'file-unwritable',
      `expected a place that can be written; received ${failure.code ?? failure.message}`,
      path ?? 'standard output',
      'check the free space and who may write there; go on with --resume',
    );
  };
  return {
    gone,
    write: async (text) => {
      check();
      if (gone() || text === '') return;
      if (!stream.write(text))
        await Promise.race([once(stream, 'drain'), once(stream, 'close')]).catch(() => undefined);
      check();
    },
    close: async () => {
      if (path !== undefined) await new Promise((resolve) => stream.end(resolve));
      check();
    },
  };
}

const TAIL = 1 << 20;

/**
 * Where the results in a file end. A line that was cut off is removed: its row is read again.
 * @returns null where there are no results yet
 * @throws TankhueError `not-results`
 */
export async function resumeFrom(path: string): Promise<Bookmark | null> {
  if (!existsSync(path)) return null;
  const file = await open(path, 'r+');
  try {
    const { size } = await file.stat();
    const from = Math.max(0, size - TAIL);
    const tail = new Uint8Array(size - from);
    await file.read(tail, 0, tail.length, from);
    const end = tail.lastIndexOf(10) + 1;
    if (end === 0 && size > 0 && from > 0) throw notResults(path);
    await file.truncate(from + end);
    if (end === 0) return null;
    const begin = tail.subarray(0, end - 1).lastIndexOf(10) + 1;
    let record: Partial<SeriesRecord>;
    try {
      record = JSON.parse(new TextDecoder().decode(tail.subarray(begin, end))) as Partial<SeriesRecord>;
    } catch {
      throw notResults(path);
    }
    const byte = record.byte?.[1];
    if (typeof byte !== 'number' || typeof record.row !== 'number' || typeof record.axisAt !== 'number')
      throw notResults(path);
    return { byte, row: record.row, axisAt: record.axisAt };
  } finally {
    await file.close();
  }
}

const notResults = (path: string): TankhueError =>
  new TankhueError(
    'not-results',
    'expected results of follow to go on from; received something else',
    path,
    'name the file of --out of the run before, or leave --resume out',
  );

/** @throws TankhueError `would-overwrite-input`, `folder-missing`, `results-exist` */
export function requireNewOutput(path: string, resume: boolean, inputs: readonly string[]): void {
  requireWritable(path, inputs);
  if (resume || !existsSync(path)) return;
  throw new TankhueError(
    'results-exist',
    'expected a new file for the results; received one that exists',
    path,
    'go on with it by --resume, or choose another name',
  );
}
