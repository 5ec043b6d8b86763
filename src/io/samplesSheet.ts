import { TankhueError, TankhueErrors } from '../errors.ts';
import { parseSide, type Side } from '../electrolyte/species.ts';
import { centimetresFromMillimetres, kelvinFromCelsius } from '../units.ts';
import { readSheet, RowReader, type Sheet, type SheetRow } from './sheet.ts';

export const SAMPLES_COLUMNS = [
  'sample',
  'system',
  'side',
  'file',
  'column',
  'blank_file',
  'blank_column',
  'path_mm',
  'path_u_mm',
  'dilution',
  'dilution_u',
  'temperature_C',
  'acid_mol_L',
  'taken_at',
  'scanned_at',
  'inert_gas',
  'replicate_of',
  'cell',
  'flask',
  'note',
] as const;

/** A cuvette as the sheet describes it. Null: nobody said. */
export interface SamplesRow {
  readonly name: string;
  readonly system: string;
  readonly side: Side;
  readonly file: string;
  readonly column: string | null;
  readonly blankFile: string | null;
  readonly blankColumn: string | null;
  /** the sheet has a column for blanks: an empty cell is then a missing blank */
  readonly blankExpected: boolean;
  /** cm */
  readonly pathLength: number | null;
  readonly pathUncertainty: number | null;
  readonly dilution: number | null;
  /** relative */
  readonly dilutionUncertainty: number | null;
  readonly temperature: number | null;
  readonly acid: number | null;
  readonly takenAt: number | null;
  readonly scannedAt: number | null;
  readonly inertGas: boolean | null;
  readonly replicateOf: string | null;
  readonly cell: string | null;
  readonly flask: string | null;
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

/** @param names of the rows before this one; its own is added */
export function samplesRow(read: RowReader, row: SheetRow, fileName: string, names: Set<string>): SamplesRow | null {
  const name = read.text('sample');
  const file = read.text('file');
  const sideText = read.text('side');
  if (name === null)
    read.refuse(
      'name-missing',
      'sample',
      'expected a name for the sample; received an empty cell',
      'write the plant, the side and the date',
    );
  else if (names.has(name))
    read.refuse(
      'name-repeats',
      'sample',
      `expected every sample to have a name of its own; received "${name}" twice`,
      'add the date or a number; say in replicate_of which sample it repeats',
    );
  else names.add(name);
  if (file === null)
    read.refuse(
      'file-missing',
      'file',
      'expected the file of the spectrum; received an empty cell',
      'write its name, relative to the sheet',
    );
  if (sideText === null)
    read.refuse(
      'unknown-side',
      'side',
      'expected negative, positive or composite; received an empty cell',
      'write the tank the sample came from',
    );
  let side: Side | null = null;
  try {
    if (sideText !== null) side = parseSide(sideText, read.where('side'));
  } catch (error) {
    if (!(error instanceof TankhueError)) throw error;
    read.problems.push(error);
  }
  const path = read.number('path_mm', (value) => value > 0, 'a path above 0 mm');
  const pathUncertainty = read.number('path_u_mm', (value) => value >= 0, '0 mm or more');
  const temperature = read.number('temperature_C', (value) => value > -20 && value < 100, '-20 to 100 °C');
  const dilution = read.number('dilution', (value) => value >= 1, 'a dilution of 1 or more');
  const dilutionUncertainty = read.number('dilution_u', (value) => value >= 0, '0 or more');
  const rest = {
    system: read.text('system') ?? '',
    column: read.text('column'),
    blankFile: read.text('blank_file'),
    blankColumn: read.text('blank_column'),
    blankExpected: read.has('blank_file'),
    pathLength: path === null ? null : centimetresFromMillimetres(path),
    pathUncertainty: pathUncertainty === null ? null : centimetresFromMillimetres(pathUncertainty),
    dilution: read.has('dilution') ? dilution : 1,
    dilutionUncertainty: dilution !== null && dilutionUncertainty !== null ? dilutionUncertainty / dilution : null,
    temperature: temperature === null ? null : kelvinFromCelsius(temperature),
    acid: read.number('acid_mol_L', (value) => value > 0, 'more than 0 mol/L'),
    takenAt: read.time('taken_at'),
    scannedAt: read.time('scanned_at'),
    inertGas: read.flag('inert_gas'),
    replicateOf: read.text('replicate_of'),
    cell: read.text('cell'),
    flask: read.text('flask'),
    note: read.text('note'),
    where: `${fileName}:${row.line}`,
  };
  return name !== null && file !== null && side !== null ? { name, file, side, ...rest } : null;
}
