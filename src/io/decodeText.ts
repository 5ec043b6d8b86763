import { TankhueError } from '../errors.ts';

export type Encoding = 'UTF-8' | 'UTF-16LE' | 'UTF-16BE' | 'Latin-1';

const LABELS: Readonly<Record<Encoding, string>> = {
  'UTF-8': 'utf-8',
  'UTF-16LE': 'utf-16le',
  'UTF-16BE': 'utf-16be',
  'Latin-1': 'windows-1252',
};

/** First bytes of files that people hand over in place of text, and what to do about each. */
const SIGNATURES: ReadonlyArray<readonly [string, readonly number[], string]> = [
  ['a zipped workbook or archive', [0x50, 0x4b, 3, 4], 'open it and save the sheet as CSV'],
  ['an old binary workbook', [0xd0, 0xcf, 0x11, 0xe0], 'open it and save the sheet as CSV'],
  ['a PDF', [0x25, 0x50, 0x44, 0x46], 'export the numbers as CSV or JCAMP-DX, not the report'],
  ['a picture (PNG)', [0x89, 0x50, 0x4e, 0x47], 'export the numbers as CSV or JCAMP-DX, not the picture'],
  ['a gzip archive', [0x1f, 0x8b], 'unpack it first'],
];

/** Bytes enough to know what a file is. */
const HEAD_BYTES = 65536;
const LEAST_HEAD_BYTES = 4096;

const startsWith = (bytes: Uint8Array, signature: readonly number[]): boolean =>
  signature.every((byte, i) => bytes[i] === byte);

/** No text has these: control characters other than tab, line ends, form feed, escape and the end-of-file mark of old systems. */
const isControl = (byte: number): boolean => byte < 32 && ![9, 10, 12, 13, 26, 27].includes(byte);

/** Every other byte of UTF-16 is 0 as long as the text is mostly Latin letters and digits; the bytes between are text. */
function isUnmarkedUtf16(bytes: Uint8Array, high: 0 | 1): boolean {
  const units = Math.min(bytes.length, 4096) >> 1;
  let latin = 0;
  for (let i = 0; i < units; i++) {
    const low = bytes[2 * i + 1 - high]!;
    if (bytes[2 * i + high] !== 0) {
      if (low === 0) return false;
    } else if (isControl(low)) return false;
    else latin++;
  }
  return latin > 0.4 * units;
}

function isUtf8(head: Uint8Array): boolean {
  try {
    // As a stream, because the last character of the head may be cut in two.
    new TextDecoder('utf-8', { fatal: true }).decode(head, { stream: true });
    return true;
  } catch {
    return false;
  }
}

/**
 * The encoding of a text: its mark, else the zeros of UTF-16, else UTF-8 where the bytes are valid; what is left is Latin-1.
 * @param bytes the beginning of the file, or all of it
 * @throws TankhueError `file-empty`, `binary`
 */
export function encodingOf(bytes: Uint8Array, fileName: string): Encoding {
  const head = bytes.subarray(0, HEAD_BYTES);
  if (head.length === 0)
    throw new TankhueError('file-empty', 'expected data; received an empty file', fileName, 'export the file again');
  for (const [what, signature, hint] of SIGNATURES)
    if (startsWith(head, signature))
      throw new TankhueError('binary', `expected text; received ${what}`, fileName, hint);
  if (startsWith(head, [0xff, 0xfe])) return 'UTF-16LE';
  if (startsWith(head, [0xfe, 0xff])) return 'UTF-16BE';
  if (isUnmarkedUtf16(head, 1)) return 'UTF-16LE';
  if (isUnmarkedUtf16(head, 0)) return 'UTF-16BE';
  const control = head.findIndex(isControl);
  if (control >= 0)
    throw new TankhueError(
      'binary',
      `expected text; received byte 0x${head[control]!.toString(16).padStart(2, '0')} at offset ${control}`,
      fileName,
      'export the spectrum as text (CSV) or JCAMP-DX',
    );
  return isUtf8(head) ? 'UTF-8' : 'Latin-1';
}

/**
 * A whole text; a mark at its start is left out.
 * @throws TankhueError `file-empty`, `binary`
 */
export function decodeText(bytes: Uint8Array, fileName: string): string {
  return new TextDecoder(LABELS[encodingOf(bytes, fileName)]).decode(bytes);
}

/** Lines of text without their ends: LF, CRLF or CR, also mixed. */
function* linesOf(texts: Iterable<string>): Generator<string> {
  let rest = '';
  for (const chunk of texts) {
    const text = rest + chunk;
    // A CR at the very end may be half of a CRLF.
    const end = text.endsWith('\r') ? text.length - 1 : text.length;
    const lines = text.slice(0, end).split(/\r\n|\n|\r/);
    rest = lines.pop()! + text.slice(end);
    yield* lines;
  }
  if (rest) yield rest.replace(/\r$/, '');
}

function* decoded(first: Uint8Array, others: Iterator<Uint8Array>, encoding: Encoding): Generator<string> {
  const decoder = new TextDecoder(LABELS[encoding]);
  yield decoder.decode(first, { stream: true });
  for (let next = others.next(); !next.done; next = others.next()) yield decoder.decode(next.value, { stream: true });
  yield decoder.decode();
}

/** Pieces until there are enough bytes to know what the file is: a pipe may begin with very few. */
function headOf(chunks: Iterator<Uint8Array>): Uint8Array {
  let head = new Uint8Array();
  while (head.length < LEAST_HEAD_BYTES) {
    const next = chunks.next();
    if (next.done) break;
    const longer = new Uint8Array(head.length + next.value.length);
    longer.set(head);
    longer.set(next.value, head.length);
    head = longer;
  }
  return head;
}

/**
 * Lines of a file that comes in pieces, decoded as they come.
 * @throws TankhueError `file-empty`, `binary`
 */
export function linesOfChunks(
  chunks: Iterable<Uint8Array>,
  fileName: string,
): { readonly encoding: Encoding; readonly lines: Iterable<string> } {
  const iterator = chunks[Symbol.iterator]();
  const head = headOf(iterator);
  const encoding = encodingOf(head, fileName);
  return { encoding, lines: linesOf(decoded(head, iterator, encoding)) };
}
