import { TankhueError, quoted } from '../errors.ts';
import { kindOfCell, splitCells, type CellKind } from './cells.ts';
import { decimalEvidence, type DecimalMark } from './numberText.ts';
import { SEPARATORS, type ReadOptions, type Separator } from './readOptions.ts';
import { axisUnitOf } from './unitWords.ts';

// What        Where the numbers of a delimited text begin and how they are written.
// Why so      Header prose may hold any character, so separator and decimal mark are read off the longest run of lines that are
//             numbers throughout; a separator that is wrong leaves cells like "5;0" that are no numbers. Where two readings of the same
//             characters remain (400,5,0,123), a person decides.
// Source      ours.

/** Captions and block of a text's numbers, found in its first lines. */
export interface NumberBlock {
  readonly separator: Separator;
  readonly decimal: DecimalMark;
  /** 400,5,0,123: a decimal comma and a comma between cells; cells are joined two by two */
  readonly commaBoth: boolean;
  /** `rows` when the axis lies in the first line of the block */
  readonly orientation: 'columns' | 'rows';
  /** index of the block's first line; in `rows` that of the axis */
  readonly first: number;
  /** cells in a line */
  readonly cells: number;
  /** cells before the first value of a line, in `rows` */
  readonly labels: number;
}

interface Run {
  readonly first: number;
  readonly length: number;
  readonly cells: number;
}

interface AxisRow extends Run {
  readonly labels: number;
}

interface Tokens {
  readonly cells: readonly string[];
  readonly kinds: readonly CellKind[];
}

/** Wavelengths in nm and wavenumbers in cm⁻¹ of any photometer lie above; absorbances, per cents and sample numbers mostly below. */
const LEAST_AXIS_VALUE = 100;

const loose = (cell: string): number => Number(cell.replace(',', '.'));

const tokensOf = (lines: readonly string[], separator: Separator): Tokens[] =>
  lines.map((line) => {
    const cells = splitCells(line, separator);
    return { cells, kinds: cells.map(kindOfCell) };
  });

const isBlank = ({ kinds }: Tokens): boolean => kinds.every((kind) => kind === 'empty');
const isNumeric = ({ kinds }: Tokens): boolean =>
  kinds.length >= 2 && kinds.includes('number') && !kinds.includes('text');

function longestRun(tokens: readonly Tokens[]): Run | null {
  const runs: { first: number; length: number; cells: number }[] = [];
  let broken = true;
  for (const [i, token] of tokens.entries()) {
    if (isBlank(token)) continue;
    const current = runs.at(-1);
    if (!isNumeric(token)) broken = true;
    else if (!broken && current && current.cells === token.cells.length) current.length++;
    else {
      runs.push({ first: i, length: 1, cells: token.cells.length });
      broken = false;
    }
  }
  return runs.reduce<Run | null>((a, b) => (a && a.length * a.cells >= b.length * b.cells ? a : b), null);
}

export function strictlyMonotonic(values: ArrayLike<number>): boolean {
  const sign = Math.sign(values[1]! - values[0]!);
  if (sign === 0) return false;
  for (let i = 1; i < values.length; i++) if (!((values[i]! - values[i - 1]!) * sign > 0)) return false;
  return true;
}

const isAxis = (cells: readonly string[]): boolean => {
  const values = cells.map(loose);
  return values.length >= 2 && values.every((value) => value >= LEAST_AXIS_VALUE) && strictlyMonotonic(values);
};

/** `400 nm` along a first line is 400. */
export const withoutUnit = (cell: string): string => cell.replace(/^([\d.,]+)\s*nm$/i, '$1');

/** A line of labels followed by a rising or falling axis, with lines of as many values below it. */
function axisRow(tokens: readonly Tokens[]): AxisRow | null {
  for (const [i, { cells: written }] of tokens.entries()) {
    const cells = written.map(withoutUnit);
    const kinds = cells.map(kindOfCell);
    const labels = kinds.findIndex((kind) => kind === 'number');
    if (labels < 1 || kinds.slice(labels).some((kind) => kind !== 'number') || !isAxis(cells.slice(labels))) continue;
    let length = 0;
    for (const below of tokens.slice(i + 1)) {
      if (isBlank(below)) continue;
      const values = below.kinds.slice(labels);
      if (below.cells.length !== cells.length || values.includes('text') || !values.includes('number')) break;
      length++;
    }
    if (length > 0) return { first: i, length, cells: cells.length, labels };
  }
  return null;
}

const SIGNS: Readonly<Record<Separator, RegExp>> = { tab: /\t/, semicolon: /;/, comma: /,/, space: /\S\s+\S/ };

const mayBeSplitBy = (lines: readonly string[], separator: Separator): boolean =>
  lines.some((line) => SIGNS[separator].test(line));

interface Candidate {
  readonly separator: Separator;
  readonly tokens: readonly Tokens[];
  readonly run: Run | null;
  readonly axis: AxisRow | null;
}

const weightOf = ({ run, axis }: Candidate): number =>
  Math.max(run ? run.length * run.cells : 0, axis ? (axis.length + 1) * axis.cells : 0);

function refuseNoNumbers(lines: readonly string[], file: string): never {
  const lone = lines.findIndex((line) => kindOfCell(line.trim()) === 'number');
  if (lone >= 0)
    throw new TankhueError(
      'no-spectrum',
      `expected wavelengths and values side by side; received one number a line, ${quoted(lines[lone]!.trim())}`,
      `${file}:${lone + 1}:1`,
      'export wavelength and absorbance as two columns',
    );
  const likely = lines.findIndex((line) => /^\W*\d/.test(line) && /\d\D+\d/.test(line));
  throw new TankhueError(
    'no-numbers',
    likely < 0
      ? `expected a table of numbers; received ${lines.length} lines without one`
      : `expected a table of numbers; received ${quoted(lines[likely]!.trim())}, which is no row of them`,
    likely < 0 ? file : `${file}:${likely + 1}:1`,
    'export the spectrum as text (CSV) or JCAMP-DX, plain numbers without units or thousands marks',
  );
}

interface DecimalDecision {
  readonly decimal: DecimalMark;
  readonly commaBoth: boolean;
}

/** Cells of the block, and where it begins. */
interface Block {
  readonly rows: readonly (readonly string[])[];
  readonly text: string;
  readonly where: string;
}

function refuseDecimal({ rows, text, where }: Block, hint: string): never {
  const alike = rows.length - 1;
  const counted = alike === 0 ? '' : `; ${alike} more ${alike === 1 ? 'line is' : 'lines are'} alike`;
  throw new TankhueError(
    'decimal-mark',
    `expected a decimal mark that can be told from the separator; received ${quoted(text)}`,
    where,
    hint + counted,
  );
}

/** True when the line above has as many captions as the block has cells, none of them a number: then commas separate. */
function captionsConfirm(tokens: readonly Tokens[], run: Run): boolean {
  const above = tokens[run.first - 1];
  return above !== undefined && above.cells.length === run.cells && above.kinds.every((kind) => kind === 'text');
}

/** Whole numbers between commas: 400,5,0,123 may as well be 400.5 and 0.123. */
function decideWholeNumbers(block: Block, isConfirmed: boolean, asked: DecimalMark | undefined): DecimalDecision {
  const cells = block.rows[0]!;
  const inPairs = cells.length % 2 === 0;
  if (asked === 'point' || (asked === undefined && isConfirmed)) return { decimal: 'point', commaBoth: false };
  if (asked === 'comma' && inPairs) return { decimal: 'comma', commaBoth: true };
  const joined = Array.from({ length: cells.length / 2 }, (_, i) => `${cells[2 * i]}.${cells[2 * i + 1]}`);
  const asPoint = `--decimal point (${cells.join(' and ')})`;
  return refuseDecimal(
    block,
    inPairs
      ? `say --decimal comma (${joined.join(' and ')}) or ${asPoint}`
      : `say ${asPoint}, or export with a semicolon or tab between columns`,
  );
}

/** @param isConfirmed something beside the cells themselves says that commas separate them */
function decideDecimal(
  { separator, tokens }: Candidate,
  run: Run,
  isConfirmed: boolean,
  lines: readonly string[],
  file: string,
  asked: DecimalMark | undefined,
): DecimalDecision {
  const rows = tokens
    .slice(run.first)
    .map((token) => token.cells)
    .filter((cells) => cells.length === run.cells);
  const block = { rows, text: lines[run.first]!.trim(), where: `${file}:${run.first + 1}:1` };
  const evidence = decimalEvidence(rows);
  if (separator === 'comma' && evidence === 'none') return decideWholeNumbers(block, isConfirmed, asked);
  if (asked) return { decimal: asked, commaBoth: false };
  if (evidence === 'grouped') {
    const cell = rows.flat().find((text) => /\d,\d{3}/.test(text))!;
    const whole = cell.replace(/,/g, '');
    refuseDecimal(
      block,
      `say --decimal comma (${cell.replace(',', '.')}), or export without thousands marks if it is ${whole}`,
    );
  }
  if (evidence === 'both')
    refuseDecimal(block, 'export with one decimal mark throughout: a point and a comma both stand in this table');
  return { decimal: evidence === 'comma' ? 'comma' : 'point', commaBoth: false };
}

/** Which way the table lies, where a row of rising numbers stands above columns of numbers. */
function orientationOf(candidate: Candidate, file: string, options: ReadOptions): 'columns' | 'rows' {
  const { axis, run, tokens } = candidate;
  if (options.layout) return options.layout === 'rows' ? 'rows' : 'columns';
  if (!axis) return 'columns';
  if (!run || run.length * run.cells < axis.length) return 'rows';
  const below = tokens.slice(axis.first + 1).filter((token) => token.cells.length === run.cells && isNumeric(token));
  const firstColumn = below.map((token) => token.cells[0]!);
  if (!isAxis(firstColumn)) return 'rows';
  const corner = tokens[axis.first]!.cells[0]!;
  if (axisUnitOf(corner)) return 'columns';
  if (/time|zeit|temps|sample|probe|name|label|[([](?:s|min|h)[)\]]/i.test(corner)) return 'rows';
  throw new TankhueError(
    'layout',
    `expected one axis; received rising numbers along the first line (${tokens[axis.first]!.cells.slice(axis.labels, axis.labels + 3).join(', ')} …) and down the first column (${firstColumn.slice(0, 3).join(', ')} …)`,
    `${file}:${axis.first + 1}:1`,
    'say --layout rows (wavelengths along the first line) or --layout columns (wavelengths down the first column)',
  );
}

/** With --layout rows and no caption before the axis the first line of numbers is the axis, its first cell the corner. */
const axisOfRun = (run: Run): AxisRow => ({ ...run, labels: 1 });

/**
 * @param lines the first lines of the text, all of them or some hundred
 * @throws TankhueError `no-numbers`, `no-spectrum`, `points-missing`, `decimal-mark`, `layout`
 */
export function findNumberBlock(lines: readonly string[], file: string, options: ReadOptions): NumberBlock {
  const candidates = SEPARATORS.filter((separator) => mayBeSplitBy(lines, separator)).map((separator): Candidate => {
    const tokens = tokensOf(lines, separator);
    return { separator, tokens, run: longestRun(tokens), axis: axisRow(tokens) };
  });
  if (candidates.length === 0) refuseNoNumbers(lines, file);
  const best = candidates.reduce((a, b) => (weightOf(b) > weightOf(a) ? b : a));
  const { run, axis, separator } = best;
  if (!run && !axis) refuseNoNumbers(lines, file);
  const orientation = orientationOf(best, file, options);
  if (orientation === 'rows') {
    const rows = axis ?? axisOfRun(run!);
    // An axis along the first line rises cell by cell, which parts of numbers would not.
    const { decimal, commaBoth } = decideDecimal(best, rows, true, lines, file, options.decimal);
    if (commaBoth || rows.length < 1) refuseNoNumbers(lines, file);
    return { separator, decimal, commaBoth, orientation, first: rows.first, cells: rows.cells, labels: rows.labels };
  }
  if (!run) refuseNoNumbers(lines, file);
  const { decimal, commaBoth } = decideDecimal(
    best,
    run,
    captionsConfirm(best.tokens, run),
    lines,
    file,
    options.decimal,
  );
  return {
    separator,
    decimal,
    commaBoth,
    orientation,
    first: run.first,
    cells: commaBoth ? run.cells / 2 : run.cells,
    labels: 0,
  };
}
