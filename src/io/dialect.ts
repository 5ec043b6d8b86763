// What        Separator, decimal mark and layout of delimited numbers, decided from a sample of lines.
// Equation    of all readings (separator, decimal mark) the one that makes the longest run of equally long rows of numbers.
// Why so      Instruments write anything; a reading is only taken when no other reading explains the same lines. Where two do, both are
//             shown and the option that decides is named; nothing is guessed.
// Valid for   comma, semicolon, tab or blanks between numbers; decimal point or comma.
// Units       –
// Source      ours.
import { TankhueError, quoted } from '../errors.ts';

export type DecimalMark = 'point' | 'comma';
export type Separator = ',' | ';' | '\t' | ' ';

export interface Dialect {
  readonly separator: Separator;
  readonly decimal: DecimalMark;
  /** index of the first row of numbers */
  readonly first: number;
  /** cells in a row */
  readonly width: number;
}

export const SEPARATOR_NAMES: Readonly<Record<Separator, string>> = {
  ',': 'comma',
  ';': 'semicolon',
  '\t': 'tab',
  ' ': 'blanks',
};

const OVER_RANGE =
  /^(?:over(?:flow|range)?|ovr?|sat(?:urated)?|>\s*[\d.,]+|\*+|#+|-{2,}|[+-]?inf(?:inity)?|nan|n\/?a|oor|\?)$/i;
const WITH_POINT = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const WITH_COMMA = /^[+-]?(?:\d+(?:,\d*)?|,\d+)(?:[eE][+-]?\d+)?$/;

export const isOverRange = (cell: string): boolean => OVER_RANGE.test(cell);

/** The number in a cell; NaN for an over-range mark or an empty cell, null for text. */
export function numberIn(cell: string, decimal: DecimalMark): number | null {
  const text = cell
    .trim()
    .replace(/^"(.*)"$/, '$1')
    .trim();
  if (text === '' || isOverRange(text)) return NaN;
  if (decimal === 'point') return WITH_POINT.test(text) ? Number(text) : null;
  return WITH_COMMA.test(text) ? Number(text.replace(',', '.')) : null;
}

/** Cells of a line; with comma as both separator and decimal mark, pairs of parts are joined. */
export function cellsOf(line: string, separator: Separator, decimal: DecimalMark): string[] {
  if (separator === ' ') return line.trim().split(/\s+/);
  const cells = splitQuoted(line, separator);
  while (cells.length > 1 && cells.at(-1)!.trim() === '') cells.pop();
  if (separator !== ',' || decimal !== 'comma') return cells;
  if (line.includes('"')) return cells;
  const joined: string[] = [];
  for (let i = 0; i < cells.length; i += 2) joined.push(cells.slice(i, i + 2).join(','));
  return joined;
}

function splitQuoted(line: string, separator: string): string[] {
  if (!line.includes('"')) return line.split(separator);
  const cells: string[] = [];
  let cell = '';
  let quotedNow = false;
  for (const character of line) {
    if (character === '"') quotedNow = !quotedNow;
    else if (character === separator && !quotedNow) {
      cells.push(cell);
      cell = '';
    } else cell += character;
  }
  return [...cells, cell];
}

const READINGS: readonly (readonly [Separator, DecimalMark])[] = [
  ['\t', 'point'],
  ['\t', 'comma'],
  [';', 'point'],
  [';', 'comma'],
  [',', 'point'],
  [',', 'comma'],
  [' ', 'point'],
  [' ', 'comma'],
];

interface Run extends Dialect {
  readonly length: number;
  /** cells that carry a fraction: a reading that finds fractions beats one that finds whole numbers only */
  readonly fractions: number;
}

/**
 * @param sample first lines of the file
 * @param wanted the decimal mark, where the person said
 * @throws TankhueError `no-numbers`, `decimal-mark`
 */
export function decideDialect(sample: readonly string[], fileName: string, wanted?: DecimalMark): Dialect {
  const runs = READINGS.filter(([, decimal]) => wanted === undefined || decimal === wanted)
    .map(([separator, decimal]) => longestRun(sample, separator, decimal))
    .filter((run) => run !== null)
    .sort((a, b) => b.length - a.length || b.fractions - a.fractions || b.width - a.width);
  const best = runs[0];
  if (!best)
    throw new TankhueError(
      'no-numbers',
      `expected rows of two numbers or more; received ${quoted(sample.find((line) => line.trim()) ?? '')}`,
      `${fileName}:1`,
      'export the spectrum as text with one row for each wavelength',
    );
  if (wanted === undefined) refuseAmbiguity(sample, best, fileName);
  return best;
}

/** Commas only, no point anywhere: 400,5,0,123 may be 400.5 and 0.123, or four numbers. A header of as many names decides. */
function refuseAmbiguity(sample: readonly string[], best: Run, fileName: string): void {
  if (best.separator !== ',') return;
  const row = sample[best.first]!;
  if (row.includes('.') || row.includes('"')) return;
  const rows = sample.slice(best.first, best.first + best.length);
  if (rows.some((line) => line.includes('.'))) return;
  const parts = row.split(',').length;
  if (parts % 2 === 1 && best.decimal === 'point') return;
  if (parts === 2) return;
  const header = best.first > 0 ? splitQuoted(sample[best.first - 1]!, ',').filter((cell) => cell.trim()).length : 0;
  const pointFits = header === parts;
  const commaFits = header === parts / 2;
  if (best.decimal === 'point' ? pointFits : commaFits) return;
  const numbers = row.split(',');
  const asComma = Array.from({ length: parts / 2 }, (_, i) => `${numbers[2 * i]}.${numbers[2 * i + 1]}`);
  throw new TankhueError(
    'decimal-mark',
    `expected a decimal mark that can be told from the separator; received ${quoted(row)}`,
    `${fileName}:${best.first + 1}:1`,
    `say --decimal comma (${asComma.join(' and ')}) or --decimal point (${numbers.join(', ')}); ${rows.length - 1} more lines are alike`,
  );
}

function longestRun(sample: readonly string[], separator: Separator, decimal: DecimalMark): Run | null {
  let best: Run | null = null;
  let start = -1;
  let width = 0;
  let fractions = 0;
  const close = (end: number): void => {
    if (start >= 0 && (best === null || end - start > best.length))
      best = { separator, decimal, first: start, width, length: end - start, fractions };
    start = -1;
  };
  sample.forEach((line, i) => {
    if (line.trim() === '' && start >= 0) return;
    const cells = cellsOf(line, separator, decimal);
    const numbers = cells.map((cell) => numberIn(cell, decimal));
    const numeric =
      cells.length >= 2 &&
      numbers.every((value) => value !== null) &&
      Number.isFinite(numbers[0]) &&
      line.trim() !== '';
    if (!numeric || (start >= 0 && cells.length !== width)) close(i);
    if (numeric && start < 0) {
      start = i;
      width = cells.length;
      fractions = 0;
    }
    if (numeric) fractions += numbers.filter((value) => value !== null && !Number.isInteger(value)).length;
  });
  close(sample.length);
  return best;
}
