import Papa from 'papaparse';
import { TankhueError, TankhueErrors, quoted } from '../errors.ts';
import { decodeText } from './decodeText.ts';
import { listed, nearest } from './nearest.ts';
import { groupsThousands, isDecimalComma, isDecimalPoint, numberFromText } from './numberText.ts';

/** One row of a sheet: texts by column, and where each stands, for messages. */
export interface SheetRow {
  readonly line: number;
  readonly cells: ReadonlyMap<string, string>;
  /** `file:line:column` of a column's cell */
  readonly where: (column: string) => string;
}

export interface Sheet {
  readonly rows: readonly SheetRow[];
  readonly columns: readonly string[];
  /** columns nobody asked for: kept and reported */
  readonly unknownColumns: readonly string[];
  /** some number has a comma that can only be a decimal mark, and none has a point */
  readonly decimalComma: boolean;
}

// papaparse takes the quotes apart and nothing else. Its traps: it guesses separators, knows no decimal comma, mis-splits CRLF mixed with
// CR, loses a header `__proto__`, and tells of open quotes only on the side; so all of that is decided here.
function cellsOf(text: string, delimiter: string, fileName: string): ParsedLine[] {
  const { data, errors } = Papa.parse<string[]>(text, { delimiter, newline: '\n', skipEmptyLines: false });
  const lineOf = lineNumbers(data);
  const open = errors.find((error) => error.type === 'Quotes');
  if (open)
    throw new TankhueError(
      'quote-open',
      'expected each quote to be closed before the next separator; received one that is not',
      `${fileName}:${lineOf(open.row ?? 0)}:1`,
      'close the quotation mark, or write "" for a mark inside',
    );
  return data
    .map((cells, row) => ({ line: lineOf(row), cells: cells.map((cell) => cell.trim()) }))
    .filter(({ cells }) => cells.some((cell) => cell !== ''));
}

interface ParsedLine {
  readonly line: number;
  readonly cells: string[];
}

/**
 * Reads a sheet whose header names are fixed and whose column order is free. Separators are commas, semicolons or tabs.
 * @param known all columns that mean something
 * @param needed those without which nothing can be done
 * @throws TankhueErrors `file-empty`, `header-missing`, `column-missing`, `column-repeats`, `column-name`, `column-unit`, `quote-open`,
 *   `row-ragged`, `no-rows`
 */
export function readSheet(
  bytes: Uint8Array,
  fileName: string,
  known: readonly string[],
  needed: readonly string[],
): Sheet {
  const text = decodeText(bytes, fileName).replace(/\r\n?/g, '\n');
  const delimiter = separatorOf(text, known, fileName);
  const [header, ...lines] = cellsOf(text, delimiter, fileName);
  const columns = header!.cells;
  while (columns.at(-1) === '') columns.pop();
  requireColumns(columns, known, needed, `${fileName}:${header!.line}`);
  requireFullRows(lines, columns.length, delimiter, fileName);
  if (lines.length === 0)
    throw new TankhueError(
      'no-rows',
      'expected a row for each cuvette; received only the header',
      `${fileName}:${header!.line}:1`,
      'fill in a row for each cuvette',
    );
  const cells = lines.flatMap((line) => line.cells);
  return {
    rows: lines.map(({ line, cells }) => ({
      line,
      cells: new Map(columns.map((column, j) => [column, cells[j]!])),
      where: (column) => `${fileName}:${line}:${columns.indexOf(column) + 1}`,
    })),
    columns,
    unknownColumns: columns.filter((column) => column !== '' && !known.includes(column)),
    decimalComma: cells.some(isDecimalComma) && !cells.some(isDecimalPoint),
  };
}

/** Every row as long as the header, empty cells at its end aside: a missing or stray separator would move values to other columns. */
function requireFullRows(lines: readonly ParsedLine[], width: number, delimiter: string, fileName: string): void {
  const problems: TankhueError[] = [];
  for (const { line, cells } of lines) {
    while (cells.length > width && cells.at(-1) === '') cells.pop();
    if (cells.length === width) continue;
    problems.push(
      new TankhueError(
        'row-ragged',
        `expected ${width} cells as in the header; received ${cells.length}`,
        `${fileName}:${line}:1`,
        `is there a ${delimiter === ',' ? 'decimal comma or an unquoted comma' : 'stray or missing separator'} in the row?`,
      ),
    );
  }
  throwAny(problems);
}

function throwAny(problems: readonly TankhueError[]): void {
  const [first, ...others] = problems;
  if (first) throw new TankhueErrors([first, ...others]);
}

/** The separator that takes the most known names out of the first line. */
function separatorOf(text: string, known: readonly string[], fileName: string): string {
  const header = text.split('\n').find((line) => line.trim() !== '') ?? '';
  const names = (separator: string): number =>
    header.split(separator).filter((cell) => known.includes(cell.replace(/"/g, '').trim())).length;
  const best = [',', ';', '\t']
    .map((separator) => ({ separator, count: names(separator) }))
    .reduce((a, b) => (b.count > a.count ? b : a));
  if (best.count > 0) return best.separator;
  throw new TankhueErrors([
    new TankhueError(
      'header-missing',
      `expected a first line with column names such as ${known.slice(0, 5).join(', ')}; received ${quoted(header.trim())}`,
      `${fileName}:1:1`,
      'write the names in the first line, between commas, semicolons or tabs',
    ),
  ]);
}

/** Line of each parsed row, counting line breaks inside quoted cells. */
function lineNumbers(data: readonly string[][]): (row: number) => number {
  const starts: number[] = [];
  let line = 1;
  for (const row of data) {
    starts.push(line);
    line += 1 + row.reduce((sum, cell) => sum + (cell.match(/\n/g)?.length ?? 0), 0);
  }
  return (row) => starts[row] ?? line;
}

const UNIT_SUFFIX = /_(mm|cm|m|um|nm|L|mL|m3|C|K|F|mol_L|mmol_L|g_L|mg_L|M|mM|V|mV|mol|Ah)$/;

function requireColumns(
  columns: readonly string[],
  known: readonly string[],
  needed: readonly string[],
  where: string,
): void {
  const problems: TankhueError[] = [];
  columns.forEach((column, j) => {
    if (column !== '' && columns.indexOf(column) !== j)
      problems.push(
        new TankhueError(
          'column-repeats',
          `expected each column once; received "${column}" twice`,
          `${where}:${j + 1}`,
          'delete or rename one of them',
        ),
      );
    if (known.includes(column)) return;
    const otherCase = known.find((name) => name.toLowerCase() === column.toLowerCase());
    if (otherCase)
      problems.push(
        new TankhueError(
          'column-name',
          `expected the column ${otherCase}; received "${column}"`,
          `${where}:${j + 1}`,
          `write ${otherCase}: names are fixed, so that none is overlooked`,
        ),
      );
    const stem = column.replace(UNIT_SUFFIX, '');
    const twin =
      stem === column ? undefined : known.find((name) => name !== column && name.replace(UNIT_SUFFIX, '') === stem);
    if (twin && !otherCase)
      problems.push(
        new TankhueError(
          'column-unit',
          `expected the column ${twin}; received "${column}"`,
          `${where}:${j + 1}`,
          `convert the numbers to the unit of ${twin} and rename the column`,
        ),
      );
  });
  for (const column of needed)
    if (!columns.includes(column)) {
      const near = nearest(
        column,
        columns.filter((name) => !known.includes(name)),
      );
      problems.push(
        new TankhueError(
          'column-missing',
          `expected the column ${column}; received ${listed(columns.filter(Boolean))}`,
          where,
          near ? `did you mean it by "${near}"? rename it` : 'add the column; an empty cell means unknown',
        ),
      );
    }
  throwAny(problems);
}

/** Reads typed cells of one row and keeps every problem, so that all of a row are shown at once. */
export class RowReader {
  readonly problems: TankhueError[] = [];
  private readonly row: SheetRow;
  private readonly decimalComma: boolean;

  constructor(row: SheetRow, decimalComma: boolean) {
    this.row = row;
    this.decimalComma = decimalComma;
  }

  /** Text of a cell; null where it is empty or the column is not there. */
  text(column: string): string | null {
    return this.row.cells.get(column) || null;
  }

  where(column: string): string {
    return this.row.where(column);
  }

  /** Whether the sheet has the column at all: an empty cell says "unknown", a missing column says nothing. */
  has(column: string): boolean {
    return this.row.cells.has(column);
  }

  /** A finite number; null where empty. */
  number(column: string, isAllowed: (value: number) => boolean = () => true, expected = 'a number'): number | null {
    const text = this.text(column);
    if (text === null) return null;
    if (this.isUnclear(text)) {
      const comma = text.includes(',');
      this.refuse(
        'decimal-mark',
        column,
        `expected a ${comma ? 'comma' : 'point'} in ${column} that cannot be a thousands mark; received ${quoted(text)}`,
        `write ${text.replace(/[.,]/g, '')} or ${comma ? text.replace(',', '.') : text.replace('.', ',')}, whichever is meant`,
      );
      return null;
    }
    const value = numberFromText(text, text.includes(',') ? 'comma' : 'point');
    if (Number.isFinite(value) && isAllowed(value)) return value;
    this.refuse(
      'out-of-range',
      column,
      `expected ${expected} in ${column}; received ${quoted(text)}`,
      'write a plain number in the unit of the column, or leave the cell empty for unknown',
    );
    return null;
  }

  /** 1,234 where no other cell shows what a comma means; 1.234 among decimal commas. */
  private isUnclear(text: string): boolean {
    return groupsThousands(text) && text.includes('.') === this.decimalComma;
  }

  /** A point in time, ms since 1970; null where empty. ISO 8601, with or without zone (then local to the sheet, read as UTC). */
  time(column: string): number | null {
    const text = this.text(column);
    if (text === null) return null;
    const iso = /^\d{4}-\d{2}-\d{2}(?:[T ]\d{2}:\d{2}(?::\d{2}(?:\.\d+)?)?)?(Z|[+-]\d{2}:?\d{2})?$/.exec(text);
    const value = iso ? Date.parse(text.replace(' ', 'T') + (iso[1] || !/[T ]/.test(text) ? '' : 'Z')) : NaN;
    if (Number.isFinite(value)) return value;
    this.refuse(
      'not-a-time',
      column,
      `expected a date and time in ${column}; received ${quoted(text)}`,
      'write 2026-05-17T08:30',
    );
    return null;
  }

  /** yes/no; null where empty. */
  flag(column: string): boolean | null {
    const text = this.text(column)?.toLowerCase();
    if (text === undefined) return null;
    if (['yes', 'true', '1', 'y', 'argon', 'nitrogen', 'n2', 'ar'].includes(text)) return true;
    if (['no', 'false', '0', 'n', 'none', 'air'].includes(text)) return false;
    this.refuse(
      'not-a-flag',
      column,
      `expected yes or no in ${column}; received ${quoted(text)}`,
      'write yes or no, or leave the cell empty for unknown',
    );
    return null;
  }

  refuse(code: string, column: string, message: string, hint: string): void {
    this.problems.push(new TankhueError(code, message, this.where(column), hint));
  }
}
