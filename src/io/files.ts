import { createHash, randomBytes } from 'node:crypto';
import {
  closeSync,
  existsSync,
  openSync,
  readSync,
  readdirSync,
  readFileSync,
  renameSync,
  rmSync,
  statSync,
  writeSync,
  fsyncSync,
} from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { TankhueError } from '../errors.ts';
import { decoderFor, encodingOf, linesOfChunks, refuseBinary } from './decodeText.ts';
import { nearest } from './nearest.ts';
import { parseSpectraLines, type ReadOptions, type SpectraRead } from './spectra.ts';

/** The only file that touches the disk. */

export const sha256Of = (data: Uint8Array | string): string => createHash('sha256').update(data).digest('hex');

/** @throws TankhueError `file-missing`, `is-directory`, `file-empty` */
function requireFile(path: string): void {
  if (!existsSync(path))
    throw new TankhueError('file-missing', `expected a file; received nothing of that name`, path, missingHint(path));
  if (statSync(path).isDirectory())
    throw new TankhueError('is-directory', 'expected a file; received a directory', path, 'name the file inside it');
  if (statSync(path).size === 0)
    throw new TankhueError('file-empty', 'expected data; received an empty file', path, 'export the file again');
}

/** @throws TankhueError `file-missing`, `is-directory`, `file-empty`, `file-unreadable` */
export function readFileBytes(path: string): Uint8Array {
  requireFile(path);
  let bytes: Uint8Array;
  try {
    bytes = readFileSync(path);
  } catch (error) {
    throw new TankhueError(
      'file-unreadable',
      `expected a readable file; received ${(error as Error).message}`,
      path,
      'check its permissions',
    );
  }
  return bytes;
}

function missingHint(path: string): string {
  const folder = dirname(path);
  if (!existsSync(folder)) return `the folder ${folder} does not exist either; check the path`;
  const near = nearest(basename(path), readdirSync(folder));
  return near ? `did you mean ${join(folder, near)}?` : 'check the name and the folder';
}

/**
 * Refuses an output that could not be written, before work is done for it.
 * @throws TankhueError `would-overwrite-input`, `folder-missing`, `is-directory`
 */
export function requireWritable(path: string, inputs: readonly string[]): void {
  const target = resolve(path);
  if (inputs.some((input) => resolve(input) === target))
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
 */
export function writeWhole(path: string, content: string | Uint8Array, inputs: readonly string[] = []): void {
  requireWritable(path, inputs);
  const target = resolve(path);
  const temporary = `${target}.${randomBytes(4).toString('hex')}.part`;
  const file = openSync(temporary, 'wx');
  try {
    writeSync(file, typeof content === 'string' ? Buffer.from(content) : content);
    fsyncSync(file);
  } catch (error) {
    rmSync(temporary, { force: true });
    throw error;
  } finally {
    closeSync(file);
  }
  renameSync(temporary, target);
}

const CHUNK = 1 << 20;

/** Text of a file in chunks, so that its size does not matter; every chunk is shown to `onBytes` as read. */
function* textChunks(path: string, onBytes: (bytes: Uint8Array) => void): Generator<string> {
  requireFile(path);
  const file = openSync(path, 'r');
  try {
    const buffer = Buffer.allocUnsafe(CHUNK);
    let decode: ReturnType<typeof decoderFor> | null = null;
    for (let length = readSync(file, buffer); length > 0; length = readSync(file, buffer)) {
      let bytes: Uint8Array = buffer.subarray(0, length);
      onBytes(bytes);
      const first = decode === null;
      if (decode === null) {
        const { encoding, skip } = encodingOf(bytes.subarray(0, 65536));
        decode = decoderFor(encoding);
        bytes = bytes.subarray(skip);
      }
      const text = decode(bytes, false);
      if (first) refuseBinary(text, path);
      yield text;
    }
    if (decode) yield decode(new Uint8Array(), true);
  } finally {
    closeSync(file);
  }
}

/**
 * Spectra of a file on disk, read in chunks. The hash is that of the whole file.
 * @param shownAs the name used in messages and records
 */
export function readSpectraFile(
  path: string,
  options: ReadOptions = {},
  shownAs = path,
): SpectraRead & { readonly sha256: string } {
  const hash = createHash('sha256');
  const read = parseSpectraLines(linesOfChunks(textChunks(path, (bytes) => hash.update(bytes))), shownAs, '', options);
  const sha256 = hash.digest('hex');
  return { ...read, spectra: read.spectra.map((one) => ({ ...one, origin: { ...one.origin, sha256 } })), sha256 };
}
