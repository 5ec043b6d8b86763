import { createHash, randomBytes } from 'node:crypto';
import {
  closeSync,
  existsSync,
  fsyncSync,
  openSync,
  readdirSync,
  readFileSync,
  readSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { TankhueError } from '../errors.ts';
import { nearest } from './nearest.ts';
import type { ReadOptions } from './readOptions.ts';
import { parseSpectraChunks, withHash } from './spectra.ts';
import type { SpectraRead } from './understood.ts';

/** The only file that touches the disk. */

export const sha256Of = (data: Uint8Array | string): string => createHash('sha256').update(data).digest('hex');

function missingHint(path: string): string {
  const folder = dirname(path);
  if (!existsSync(folder)) return `the folder ${folder} does not exist either; check the path`;
  const near = nearest(basename(path), readdirSync(folder));
  return near ? `did you mean ${join(folder, near)}?` : 'check the name and the folder';
}

/** @throws TankhueError `file-missing`, `is-directory`, `file-empty` */
function requireFile(path: string): void {
  const found = statSync(path, { throwIfNoEntry: false });
  if (!found)
    throw new TankhueError('file-missing', 'expected a file; received nothing of that name', path, missingHint(path));
  if (found.isDirectory())
    throw new TankhueError('is-directory', 'expected a file; received a directory', path, 'name the file inside it');
  if (found.isFile() && found.size === 0)
    throw new TankhueError('file-empty', 'expected data; received an empty file', path, 'export the file again');
}

/** @throws TankhueError `file-unreadable` */
function openForReading(path: string): number {
  try {
    return openSync(path, 'r');
  } catch (error) {
    throw new TankhueError(
      'file-unreadable',
      `expected a readable file; received ${(error as NodeJS.ErrnoException).code ?? String(error)}`,
      path,
      'check who may read it, or copy it to a folder of yours',
    );
  }
}

/** @throws TankhueError `file-missing`, `is-directory`, `file-empty`, `file-unreadable` */
export function readFileBytes(path: string): Uint8Array {
  requireFile(path);
  const file = openForReading(path);
  try {
    return readFileSync(file);
  } finally {
    closeSync(file);
  }
}

const CHUNK_BYTES = 1 << 20;

/**
 * A file in pieces, from a byte offset to its present end, so that its size does not matter. A piece is good until the next is asked for.
 * @throws TankhueError `file-missing`, `is-directory`, `file-empty`, `file-unreadable`
 */
export function* readChunks(path: string, start = 0, chunkBytes = CHUNK_BYTES): Generator<Uint8Array> {
  requireFile(path);
  const file = openForReading(path);
  try {
    const buffer = new Uint8Array(chunkBytes);
    // Without a position the system keeps it, which a pipe needs.
    let position = start === 0 ? null : start;
    for (;;) {
      const length = readSync(file, buffer, 0, chunkBytes, position);
      if (length === 0) return;
      if (position !== null) position += length;
      yield buffer.subarray(0, length);
    }
  } finally {
    closeSync(file);
  }
}

/** Where a name leads in the end, links followed. */
const destination = (path: string): string => (existsSync(path) ? realpathSync(path) : resolve(path));

/**
 * Refuses an output that could not be written, before work is done for it.
 * @throws TankhueError `would-overwrite-input`, `folder-missing`, `is-directory`
 */
export function requireWritable(path: string, inputs: readonly string[]): void {
  const target = destination(path);
  if (inputs.some((input) => destination(input) === target))
    throw new TankhueError(
      'would-overwrite-input',
      'expected an output of another name than the inputs; received the same',
      path,
      'choose another name for the result',
    );
  if (!existsSync(dirname(target)))
    throw new TankhueError(
      'folder-missing',
      'expected an existing folder; received none',
      dirname(path),
      'make the folder first',
    );
  if (existsSync(target) && statSync(target).isDirectory())
    throw new TankhueError('is-directory', 'expected a file name; received a directory', path, 'name a file inside it');
}

/**
 * Writes a whole file or nothing: to a temporary name beside it, then renamed.
 * @param inputs files of this command, which are never overwritten
 * @throws TankhueError `would-overwrite-input`, `folder-missing`, `is-directory`, `file-unwritable`
 */
export function writeWhole(path: string, content: string | Uint8Array, inputs: readonly string[] = []): void {
  requireWritable(path, inputs);
  const target = destination(path);
  const temporary = `${target}.${randomBytes(4).toString('hex')}.part`;
  try {
    const file = openSync(temporary, 'wx');
    try {
      writeFileSync(file, content);
      fsyncSync(file);
    } finally {
      closeSync(file);
    }
    renameSync(temporary, target);
  } catch (error) {
    rmSync(temporary, { force: true });
    throw new TankhueError(
      'file-unwritable',
      `expected a place that can be written; received ${(error as NodeJS.ErrnoException).code ?? String(error)}`,
      path,
      'check the free space and who may write there; nothing was changed',
    );
  }
}

/**
 * Spectra of a file on disk, read in pieces. The hash is that of the whole file.
 * @param shownAs the name used in messages and records
 * @throws TankhueError, TankhueErrors as `readChunks` and `parseSpectraChunks`
 */
export function readSpectraFile(
  path: string,
  options: ReadOptions = {},
  shownAs = path,
): SpectraRead & { readonly sha256: string } {
  const hash = createHash('sha256');
  const hashed = function* (): Generator<Uint8Array> {
    for (const chunk of readChunks(path)) {
      hash.update(chunk);
      yield chunk;
    }
  };
  const read = parseSpectraChunks(hashed(), shownAs, options);
  const sha256 = hash.digest('hex');
  return { ...withHash(read, sha256), sha256 };
}
