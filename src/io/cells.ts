import { looksLikeNumber } from './numberText.ts';
import type { Separator } from './readOptions.ts';

const CHARACTER: Readonly<Record<Exclude<Separator, 'space'>, string>> = { tab: '\t', semicolon: ';', comma: ',' };

/** Cells of one line whose quotes may hide separators. */
function splitQuoted(line: string, mark: string): string[] {
  const cells: string[] = [];
  let cell = '';
  let quotedPart = false;
  for (let i = 0; i < line.length; i++) {
    const character = line[i]!;
    if (character === '"') {
      if (quotedPart && line[i + 1] === '"') cell += line[++i]!;
      else quotedPart = !quotedPart;
    } else if (character === mark && !quotedPart) {
      cells.push(cell.trim());
      cell = '';
    } else cell += character;
  }
  cells.push(cell.trim());
  return cells;
}

/** The trimmed cells of one line; a run of blanks is one separator when blanks separate. */
export function splitCells(line: string, separator: Separator): string[] {
  if (separator === 'space') return line.trim() === '' ? [''] : line.trim().split(/\s+/);
  if (line.includes('"')) return splitQuoted(line, CHARACTER[separator]);
  return line.split(CHARACTER[separator]).map((cell) => cell.trim());
}

/** How instruments in general write a value beyond their range. */
const OVER_RANGE =
  /^(?:over(?:[ _-]?(?:range|flow))?|ovrflw|ovfl|ovr|sat(?:urated)?|[<>≥≤]\s*[+-]?\d+(?:[.,]\d*)?|[+-]?inf(?:inity)?|[+-]?∞|\*{2,}|#{2,})$/i;
/** How a value that is not there is written, besides nothing at all. */
const MISSING = /^(?:-{1,5}|–|—|\.|n\/?a|#n\/a|#value!|#num!|#div\/0!|nan|-nan|null|none|missing)$/i;

export type CellKind = 'number' | 'empty' | 'missing' | 'over-range' | 'text';

export function kindOfCell(cell: string): CellKind {
  if (cell === '') return 'empty';
  if (looksLikeNumber(cell)) return 'number';
  if (OVER_RANGE.test(cell)) return 'over-range';
  return MISSING.test(cell) ? 'missing' : 'text';
}
