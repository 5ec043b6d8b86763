import { TankhueError } from '../errors.ts';

export type Encoding = 'UTF-8' | 'UTF-16LE' | 'UTF-16BE' | 'Latin-1';

/** Byte-order mark first, then the zero bytes of UTF-16, then whether the bytes are UTF-8; what is left is Latin-1. */
export function encodingOf(head: Uint8Array): { encoding: Encoding; skip: number } {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { encoding: 'UTF-8', skip: 3 };
  if (head[0] === 0xff && head[1] === 0xfe) return { encoding: 'UTF-16LE', skip: 2 };
  if (head[0] === 0xfe && head[1] === 0xff) return { encoding: 'UTF-16BE', skip: 2 };
  const sample = head.subarray(0, 400);
  const zeros = (odd: number): number => sample.filter((byte, i) => byte === 0 && i % 2 === odd).length;
  if (zeros(1) > sample.length / 4) return { encoding: 'UTF-16LE', skip: 0 };
  if (zeros(0) > sample.length / 4) return { encoding: 'UTF-16BE', skip: 0 };
  try {
    // The last characters of the head may be cut in two; three bytes of slack cover any UTF-8 character.
    new TextDecoder('utf-8', { fatal: true }).decode(head.subarray(0, Math.max(0, head.length - 3)), { stream: true });
    return { encoding: 'UTF-8', skip: 0 };
  } catch {
    return { encoding: 'Latin-1', skip: 0 };
  }
}

const LABELS: Readonly<Record<Encoding, string>> = {
  'UTF-8': 'utf-8',
  'UTF-16LE': 'utf-16le',
  'UTF-16BE': 'utf-16be',
  'Latin-1': 'windows-1252',
};

/** A decoder of consecutive chunks. */
export function decoderFor(encoding: Encoding): (chunk: Uint8Array, last: boolean) => string {
  const decoder = new TextDecoder(LABELS[encoding]);
  return (chunk, last) => decoder.decode(chunk, { stream: !last });
}

/** @throws TankhueError `binary` where the text has control characters that no text has */
export function refuseBinary(head: string, fileName: string): void {
  // eslint-disable-next-line no-control-regex
  const control = head.slice(0, 4000).match(/[\u0000-\u0008\u000e-\u001a\u001c-\u001f]/g)?.length ?? 0;
  if (control > 2)
    throw new TankhueError(
      'binary',
      `expected text; received a binary file (${control} control characters in its beginning)`,
      fileName,
      'export the spectrum as text (CSV) or JCAMP-DX',
    );
}

/** Lines of text without their ends: LF, CRLF or CR, also mixed. */
export function* linesOfChunks(chunks: Iterable<string>): Generator<string> {
  let rest = '';
  for (const chunk of chunks) {
    const text = rest + chunk;
    // A CR at the very end may be half of a CRLF.
    const end = text.endsWith('\r') ? text.length - 1 : text.length;
    const lines = text.slice(0, end).split(/\r\n|\n|\r/);
    rest = lines.pop()! + text.slice(end);
    yield* lines;
  }
  if (rest) yield rest.replace(/\r$/, '');
}

/** Lines of a whole file in memory. */
export function* linesOfBytes(bytes: Uint8Array, fileName: string): Generator<string> {
  const { encoding, skip } = encodingOf(bytes.subarray(0, 65536));
  const text = decoderFor(encoding)(bytes.subarray(skip), true);
  refuseBinary(text, fileName);
  yield* linesOfChunks([text]);
}
