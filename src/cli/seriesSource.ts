import { open, type FileHandle } from 'node:fs/promises';
import { setTimeout as pause } from 'node:timers/promises';
import { TankhueError } from '../errors.ts';
import { encodingOf } from '../io/decodeText.ts';
import { jsonRow, type WrittenAxis } from '../io/ndjsonRows.ts';
import { noWavelengths, wideHeader, wideRows, type WideLayout } from '../io/wideRows.ts';

/** Where a reader stands in a file: everything it needs to go on from there. */
export interface Bookmark {
  /** of the next line to read */
  readonly byte: number;
  /** rows read before it */
  readonly row: number;
  /** of the line of wavelengths that holds there */
  readonly axisAt: number;
}

/** Whole lines of a file. */
export interface Piece {
  readonly offset: number;
  readonly bytes: Uint8Array;
}

export type SeriesLayout =
  { readonly kind: 'wide'; readonly wide: WideLayout } | { readonly kind: 'ndjson'; readonly axis: WrittenAxis };

/** Enough for a few hundred rows, so that work is shared out evenly; memory is a few of these. */
const PIECE_BYTES = 1 << 19;
const LONGEST_LINE = 1 << 24;
/** ms between looks at a file that does not grow */
const POLL = 500;
/** Lines before the line of wavelengths. */
const MOST_PREAMBLE = 100;

const NEWLINE = 10;

/** A file on disk that may still be written to. */
export class SeriesFile {
  private readonly path: string;
  private readonly handle: FileHandle;

  private constructor(path: string, handle: FileHandle) {
    this.path = path;
    this.handle = handle;
  }

  /** @throws TankhueError `file-missing`, `is-directory`, `file-unreadable` */
  static async open(path: string): Promise<SeriesFile> {
    let handle: FileHandle;
    try {
      handle = await open(path, 'r');
    } catch (error) {
      const missing = (error as NodeJS.ErrnoException).code === 'ENOENT';
      throw new TankhueError(
        missing ? 'file-missing' : 'file-unreadable',
        `expected a file that can be read; received ${missing ? 'nothing of that name' : (error as Error).message}`,
        path,
        'check the name, the folder and the permissions',
      );
    }
    if ((await handle.stat()).isDirectory()) {
      await handle.close();
      throw new TankhueError(
        'is-directory',
        'expected a file; received a directory',
        path,
        'name the file that the instrument writes',
      );
    }
    return new SeriesFile(path, handle);
  }

  close(): Promise<void> {
    return this.handle.close();
  }

  async size(): Promise<number> {
    return (await this.handle.stat()).size;
  }

  /** The layout, and where the first row begins. @throws TankhueError `no-wavelengths`, `binary`, `file-empty`, `encoding` */
  async head(): Promise<{ readonly layout: SeriesLayout; readonly start: Bookmark }> {
    const bytes = await this.read(0, 4 * PIECE_BYTES);
    const encoding = encodingOf(bytes, this.path);
    if (encoding === 'UTF-16LE' || encoding === 'UTF-16BE')
      throw new TankhueError('encoding', `expected UTF-8; received ${encoding}`, this.path, 'save the file as UTF-8');
    const skip = bytes[0] === 0xef ? 3 : 0;
    let position = skip;
    let first: string | undefined;
    for (let line = 0; line < MOST_PREAMBLE; line++) {
      const end = bytes.indexOf(NEWLINE, position);
      if (end < 0) break;
      const text = new TextDecoder().decode(bytes.subarray(position, end)).trim();
      first ??= text === '' ? undefined : text;
      const layout = layoutOf(text, this.path);
      if (layout) {
        const start = layout.kind === 'wide' ? end + 1 : position;
        return { layout, start: { byte: start, row: 0, axisAt: position } };
      }
      position = end + 1;
    }
    throw noWavelengths(first, `${this.path}:1`);
  }

  /** The layout whose line begins at a byte. */
  async layoutAt(byte: number): Promise<SeriesLayout> {
    const bytes = await this.read(byte, LONGEST_LINE);
    const end = bytes.indexOf(NEWLINE);
    const text = new TextDecoder().decode(bytes.subarray(0, end < 0 ? bytes.length : end)).trim();
    const layout = layoutOf(text, this.path);
    if (layout) return layout;
    throw noWavelengths(text, `${this.path}, byte ${byte}`);
  }

  /** Reads up to a byte only to count rows and to find the line of wavelengths that holds there. @throws TankhueError `not-a-line` */
  async bookmarkAt(byte: number): Promise<Bookmark> {
    const { layout, start } = await this.head();
    if (byte <= start.byte) return start;
    let { row, axisAt } = start;
    let wide = layout.kind === 'wide' ? layout.wide : null;
    let position = start.byte;
    for await (const piece of this.pieces(start.byte, () => position >= byte)) {
      let rest = piece.bytes.subarray(0, byte - piece.offset);
      position = piece.offset + rest.length;
      if (rest[rest.length - 1] !== NEWLINE) break;
      while (wide && rest.length > 0) {
        const { count, header } = wideRows(rest, wide);
        row += count;
        if (header === null) break;
        const end = rest.indexOf(NEWLINE, header) + 1;
        axisAt = position - rest.length + header;
        wide = wideHeader(new TextDecoder().decode(rest.subarray(header, end)).trim())!;
        rest = rest.subarray(end);
      }
      if (!wide)
        row += new TextDecoder()
          .decode(rest)
          .split('\n')
          .filter((line) => line.trim() !== '').length;
      if (position === byte) return { byte, row, axisAt };
    }
    throw new TankhueError(
      'not-a-line',
      `expected the first byte of a line of this file; received ${byte}`,
      '--since',
      'use the byte that was printed when the last run ended; is it the same file?',
    );
  }

  /**
   * Whole lines from a byte on. Without `wait` it ends at the last line end; with it, only when `stopped` says so.
   * @throws TankhueError `file-shrunk`
   */
  async *pieces(from: number, stopped: () => boolean, wait = false): AsyncGenerator<Piece> {
    let offset = from;
    let length = PIECE_BYTES;
    while (!stopped()) {
      const bytes = await this.read(offset, length);
      const end = bytes.lastIndexOf(NEWLINE) + 1;
      if (end > 0) {
        yield { offset, bytes: bytes.subarray(0, end) };
        offset += end;
        length = PIECE_BYTES;
      } else if (bytes.length === length && length < LONGEST_LINE) length *= 2;
      else if (!wait) return;
      else {
        const size = await this.size();
        if (size < offset)
          throw new TankhueError(
            'file-shrunk',
            `expected a file that only grows; it had ${offset} bytes and has ${size}`,
            this.path,
            'was it begun anew? start follow again without --resume; results so far are kept',
          );
        await pause(POLL);
      }
    }
  }

  /** Bytes after the last line end. */
  async unfinished(byte: number): Promise<number> {
    return (await this.size()) - byte;
  }

  private async read(offset: number, length: number): Promise<Uint8Array> {
    const bytes = new Uint8Array(length);
    const { bytesRead } = await this.handle.read(bytes, 0, length, offset);
    return bytes.subarray(0, bytesRead);
  }
}

function layoutOf(line: string, path: string): SeriesLayout | null {
  if (line.startsWith('{')) {
    const { wavelength, descending } = jsonRow(line, null, `${path}:1`);
    return { kind: 'ndjson', axis: { wavelength, descending } };
  }
  const wide = wideHeader(line);
  return wide ? { kind: 'wide', wide } : null;
}

/** The same from a stream, which can neither be looked at twice nor be resumed. @throws TankhueError `no-wavelengths` */
export async function streamedSeries(
  stream: AsyncIterable<Uint8Array>,
  name: string,
): Promise<{ readonly layout: SeriesLayout; readonly start: Bookmark; readonly pieces: AsyncGenerator<Piece> }> {
  const chunks = stream[Symbol.asyncIterator]();
  let kept: Uint8Array = new Uint8Array();
  let position = 0;
  let first: string | undefined;
  for (let line = 0; line < MOST_PREAMBLE; line++) {
    let end = kept.indexOf(NEWLINE, position);
    while (end < 0) {
      const next = await chunks.next();
      if (next.done) throw noWavelengths(first, `${name}:1`);
      kept = appended(kept, next.value);
      end = kept.indexOf(NEWLINE, position);
    }
    const text = new TextDecoder().decode(kept.subarray(position, end)).trim();
    first ??= text === '' ? undefined : text;
    const layout = layoutOf(text, name);
    if (layout) {
      const byte = layout.kind === 'wide' ? end + 1 : position;
      return {
        layout,
        start: { byte, row: 0, axisAt: position },
        pieces: streamedPieces(chunks, kept.subarray(byte), byte),
      };
    }
    position = end + 1;
  }
  throw noWavelengths(first, `${name}:1`);
}

async function* streamedPieces(
  chunks: AsyncIterator<Uint8Array>,
  begun: Uint8Array,
  offset: number,
): AsyncGenerator<Piece> {
  let kept = begun;
  let at = offset;
  for (let ended = false; !ended;) {
    const end = kept.lastIndexOf(NEWLINE) + 1;
    if (end > 0) {
      // A copy: what is kept must not hold on to what is done with.
      yield { offset: at, bytes: kept.slice(0, end) };
      kept = kept.slice(end);
      at += end;
    }
    const next = await chunks.next();
    if (next.done) ended = true;
    else kept = appended(kept, next.value);
  }
  const end = kept.lastIndexOf(NEWLINE) + 1;
  if (end > 0) yield { offset: at, bytes: kept.subarray(0, end) };
}

function appended(front: Uint8Array, back: Uint8Array): Uint8Array {
  const both = new Uint8Array(front.length + back.length);
  both.set(front);
  both.set(back, front.length);
  return both;
}
