import Papa from 'papaparse';
import { TankhueError, TankhueErrors, quoted } from '../errors.ts';
import { decoderFor, encodingOf, refuseBinary } from './decodeText.ts';
import { nearest } from './nearest.ts';

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
  /** comma sheets write 0.5, semicolon sheets may write 0,5 */
  readonly decimalComma: boolean;
}

/**
 * Reads a sheet whose header names are fixed and whose column order is free.
 * @param known all columns that mean something, @param needed those without which nothing can be done
 * @throws TankhueError(s) `file-empty`, `column-missing`, `column-repeats`, `column-unit`, `quote-open`, `row-ragged`
 */
export function readSheet(
  bytes: Uint8Array,
  fileName: string,
  known: readonly string[],
  needed: readonly string[],
): Sheet {
  if (bytes.length === 0)
    throw new TankhueError(
      'file-empty',
      'expected a sheet; received an empty file',
      fileName,
      'fill in a header line and a row for each cuvette',
    );
  const { encoding, skip } = encodingOf(bytes.subarray(0, 65536));
  const text = decoderFor(encoding)(bytes.subarray(skip), true).replace(/\r\n?/g, '\n');
  refuseBinary(text, fileName);
  const delimiter = separatorOf(text);
  const { data, errors } = Papa.parse<string[]>(text, { delimiter, skipEmptyLines: false });
  const open = errors.find((error) => error.type === 'Quotes');
  if (open)
    throw new TankhueError(
      'quote-open',
      'expected a quote at the end of a quoted cell; received none',
      `${fileName}:${(open.row ?? 0) + 1}`,
      'close the quotation mark, or write "" for a mark inside',
    );
  const headerIndex = data.findIndex((row) => row.some((cell) => cell.trim() !== ''));
  if (headerIndex < 0)
    throw new TankhueError(
      'file-empty',
      'expected a header line; received blank lines',
      fileName,
      'fill in a header line and a row for each cuvette',
    );
  const columns = data[headerIndex]!.map((cell) => cell.trim());
  const lineOf = lineNumbers(data);
  requireColumns(columns, known, needed, `${fileName}:${lineOf(headerIndex)}`);
  const rows: SheetRow[] = [];
  const problems: TankhueError[] = [];
  data.slice(headerIndex + 1).forEach((cells, offset) => {
    if (cells.every((cell) => cell.trim() === '')) return;
    const line = lineOf(headerIndex + 1 + offset);
    if (cells.length > columns.length && cells.slice(columns.length).some((cell) => cell.trim() !== ''))
      problems.push(
        new TankhueError(
          'row-ragged',
          `expected ${columns.length} cells; received ${cells.length}`,
          `${fileName}:${line}`,
          `is there a ${delimiter === ',' ? 'decimal comma or an unquoted comma' : 'stray separator'} in the row?`,
        ),
      );
    rows.push({
      line,
      cells: new Map(columns.map((column, j) => [column, (cells[j] ?? '').trim()])),
      where: (column) => `${fileName}:${line}:${columns.indexOf(column) + 1}`,
    });
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  if (rows.length === 0)
    throw new TankhueError(
      'no-rows',
      'expected a row for each cuvette; received only the header',
      `${fileName}:${lineOf(headerIndex)}`,
      'fill in a row for each cuvette',
    );
  return {
    rows,
    columns,
    unknownColumns: columns.filter((column) => column !== '' && !known.includes(column)),
    decimalComma: delimiter !== ',',
  };
}

/** The separator that the first line has most of. */
function separatorOf(text: string): string {
  const header = text.split('\n').find((line) => line.trim() !== '') ?? '';
  const counts = [',', ';', '\t'].map((separator) => ({ separator, count: header.split(separator).length }));
  return counts.sort((a, b) => b.count - a.count)[0]!.separator;
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

const UNIT_SUFFIX = /_(mm|cm|m|um|nm|L|mL|m3|C|K|F|mol_L|mM|V|mV)$/;

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
    const stem = column.replace(UNIT_SUFFIX, '');
    const twin =
      stem === column ? undefined : known.find((name) => name !== column && name.replace(UNIT_SUFFIX, '') === stem);
    if (twin)
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
          `expected the column ${column}; received ${columns.filter(Boolean).join(', ')}`,
          where,
          near ? `did you mean it by "${near}"? rename it` : 'add the column; an empty cell means unknown',
        ),
      );
    }
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
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
    const plain = this.decimalComma ? text.replace(',', '.') : text;
    const value = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/.test(plain) ? Number(plain) : NaN;
    if (Number.isFinite(value) && isAllowed(value)) return value;
    this.refuse(
      'out-of-range',
      column,
      `expected ${expected} in ${column}; received ${quoted(text)}`,
      'write a plain number in the unit of the column, or leave the cell empty for unknown',
    );
    return null;
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
