import { TankhueError } from '../errors.ts';
import { RECORD_ID } from './recordBlock.ts';

const BLOCK = new RegExp(`<script type="application/(json|gzip)" id="${RECORD_ID}">([^<]*)</script>`);

/**
 * The JSON text of the record inside a report.
 * @param where file name, for messages
 * @throws TankhueError `no-record`, `record-broken`
 */
export async function readBack(html: string, where: string): Promise<string> {
  const block = BLOCK.exec(html);
  if (!block)
    throw new TankhueError(
      'no-record',
      'expected a report that carries its record; received a file without one',
      where,
      'name a report as --report wrote it: a copy printed or saved anew by a browser may have lost it',
    );
  const [, kind, text] = block as unknown as [string, 'json' | 'gzip', string];
  if (kind === 'json') return text;
  try {
    const packed = Uint8Array.from(atob(text), (letter) => letter.charCodeAt(0));
    return await new Response(new Blob([packed]).stream().pipeThrough(new DecompressionStream('gzip'))).text();
  } catch {
    throw new TankhueError(
      'record-broken',
      'expected a whole record; received one that cannot be unpacked',
      where,
      'the file is cut off or was edited: copy it again, or make the report again',
    );
  }
}
