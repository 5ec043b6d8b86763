import type { Sample } from '../assay/sample.ts';
import { TankhueError, TankhueErrors } from '../errors.ts';
import { parseSide, type Side } from '../electrolyte/species.ts';
import { CUVETTE_COLUMNS, cuvetteCells } from './cuvetteCells.ts';
import { readSheet, RowReader, type Sheet, type SheetRow } from './sheet.ts';

export const SAMPLES_COLUMNS = [
  'sample',
  'system',
  'side',
  ...CUVETTE_COLUMNS,
  'dilution_u',
  'taken_at',
  'scanned_at',
  'inert_gas',
  'replicate_of',
  'cell',
  'flask',
  'note',
] as const;

/** A cuvette as the sheet describes it. Null: nobody said. */
export interface SamplesRow extends Omit<Sample, 'spectrum' | 'blank'> {
  readonly file: string;
  readonly column: string | null;
  readonly blankFile: string | null;
  readonly blankColumn: string | null;
  /** the sheet has a column for blanks: an empty cell is then a missing blank */
  readonly blankExpected: boolean;
  readonly replicateOf: string | null;
  readonly note: string | null;
  readonly where: string;
}

/** Rows that can be read, and the problems of those that cannot: one bad row does not stop the others. */
export interface SheetOf<Row> {
  readonly rows: readonly Row[];
  readonly problems: readonly TankhueError[];
  readonly unknownColumns: readonly string[];
}

export function readSamplesSheet(bytes: Uint8Array, fileName: string): SheetOf<SamplesRow> {
  const sheet = readSheet(bytes, fileName, SAMPLES_COLUMNS, ['sample', 'side', 'file']);
  const names = new Set<string>();
  return readRows(sheet, (read, row) => samplesRow(read, row, fileName, names));
}

/** Shared with the tanks sheet: every row through `make`, its problems kept apart. */
export function readRows<Row>(sheet: Sheet, make: (read: RowReader, row: SheetRow) => Row | null): SheetOf<Row> {
  const rows: Row[] = [];
  const problems: TankhueError[] = [];
  for (const row of sheet.rows) {
    const read = new RowReader(row, sheet.decimalComma);
    const made = make(read, row);
    if (read.problems.length > 0) problems.push(new TankhueErrors(read.problems as [TankhueError, ...TankhueError[]]));
    else if (made) rows.push(made);
  }
  return { rows, problems, unknownColumns: sheet.unknownColumns };
}

function sideOf(read: RowReader): Side | null {
  const text = read.text('side');
  if (text === null) {
    read.refuse(
      'unknown-side',
      'side',
      'expected negative, positive or composite; received an empty cell',
      'write the tank the sample came from',
    );
    return null;
  }
  try {
    return parseSide(text, read.where('side'));
  } catch (error) {
    if (!(error instanceof TankhueError)) throw error;
    read.problems.push(error);
    return null;
  }
}

/** @param seen names of the rows before this one; its own is added */
export function samplesRow(read: RowReader, row: SheetRow, fileName: string, seen: Set<string>): SamplesRow | null {
  const side = sideOf(read);
  const cuvette = cuvetteCells(read, {
    column: 'sample',
    example: 'write the plant, the side and the date',
    repeat: 'add the date or a number; say in replicate_of which sample it repeats',
    seen,
  });
  const dilutionUncertainty = read.number('dilution_u', (value) => value >= 0, '0 or more');
  const rest = {
    system: read.text('system') ?? '',
    blankExpected: read.has('blank_file'),
    dilution: read.has('dilution') ? cuvette.dilution : 1,
    dilutionUncertainty:
      cuvette.dilution !== null && dilutionUncertainty !== null ? dilutionUncertainty / cuvette.dilution : null,
    takenAt: read.time('taken_at'),
    scannedAt: read.time('scanned_at'),
    inertGas: read.flag('inert_gas'),
    replicateOf: read.text('replicate_of'),
    cell: read.text('cell'),
    flask: read.text('flask'),
    note: read.text('note'),
    where: `${fileName}:${row.line}`,
  };
  return side === null ? null : { ...cuvette, side, ...rest };
}
