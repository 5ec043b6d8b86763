import type { DecimalMark } from './numberText.ts';
import { numberFromBytes } from './numberBytes.ts';
import type { Separator } from './readOptions.ts';

const [TAB, BLANK, QUOTE] = [9, 32, 34];
const DECIMAL_BYTES = { point: 46, comma: 44 } as const;
const SEPARATOR_BYTES = { tab: TAB, semicolon: 59, comma: 44, space: BLANK } as const;

/** How the numbers of a table are written, in bytes. */
export interface NumberForm {
  /** between cells; a blank stands for any run of blanks and tabs */
  readonly separator: number;
  /** the decimal mark that the table does not use, and the quote, which may hide separators: rows with them need a closer look */
  readonly foreign: readonly number[];
}

export function numberFormOf(separator: Separator, decimal: DecimalMark): NumberForm {
  const byte = SEPARATOR_BYTES[separator];
  const otherMark = DECIMAL_BYTES[decimal === 'point' ? 'comma' : 'point'];
  return { separator: byte, foreign: otherMark === byte ? [QUOTE] : [QUOTE, otherMark] };
}

/**
 * Reads the cells of a line of nothing but numbers into `out` from `offset` on; an empty cell gives NaN.
 * @param line without its end; its tabs may be changed to blanks
 * @param most cells to be read at most
 * @returns number of cells, or −1 where a cell is no plain finite number or there are more cells than `most`
 */
export function readNumberRow(
  line: Uint8Array,
  { separator, foreign }: NumberForm,
  out: Float64Array,
  offset: number,
  most: number,
): number {
  if (foreign.some((byte) => line.includes(byte))) return -1;
  const byBlanks = separator === BLANK;
  if (byBlanks) blankTabs(line);
  let end = line.length;
  let at = 0;
  if (byBlanks) {
    while (end > 0 && line[end - 1] === BLANK) end--;
    while (line[at] === BLANK) at++;
  }
  for (let cells = 0; cells < most;) {
    const from = at;
    while (at < end && line[at] !== separator) at++;
    const value = numberFromBytes(line, from, at);
    if (!Number.isFinite(value) && !isEmpty(line, from, at)) return -1;
    out[offset + cells++] = value;
    if (at >= end) return cells;
    at++;
    if (byBlanks) while (line[at] === BLANK) at++;
  }
  return -1;
}

function blankTabs(line: Uint8Array): void {
  for (let i = line.indexOf(TAB); i >= 0; i = line.indexOf(TAB, i)) line[i] = BLANK;
}

function isEmpty(line: Uint8Array, from: number, to: number): boolean {
  for (let i = from; i < to; i++) if (line[i] !== BLANK && line[i] !== TAB) return false;
  return true;
}
