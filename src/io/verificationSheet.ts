import type { MeasuredProperty } from '../assay/instrumentRecord.ts';
import { CUT_OFF_SOLUTIONS } from '../bench/instrument/photometricStandards.ts';
import {
  INSTRUMENT_TESTS,
  type CutOffScan,
  type DichromateScan,
  type InstrumentScan,
  type InstrumentTestName,
} from '../bench/instrument/scans.ts';
import { quoted, TankhueError, TankhueErrors } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { centimetresFromMillimetres, kelvinFromCelsius } from '../units.ts';
import { nearest } from './nearest.ts';
import { readRows } from './samplesSheet.ts';
import { readSheet, type RowReader, type Sheet } from './sheet.ts';

export const VERIFICATION_COLUMNS = [
  'test',
  'file',
  'column',
  'blank_file',
  'blank_column',
  'cell',
  'path_mm',
  'path_u_mm',
  'solution',
  'concentration_mg_L',
  'concentration_u_mg_L',
  'from_nm',
  'to_nm',
  'least_A',
  'minutes',
  'refractive_index',
  'reference_file',
  'reference_column',
  'reference_path_mm',
  'reference_path_u_mm',
  'temperature_C',
  'certificate_temperature_C',
  'note',
] as const;

/** Fetches a spectrum named on a sheet. @param where the cell that names it */
export type SpectrumLoader = (file: string, column: string | null, where: string) => Spectrum;

export interface VerificationScans {
  readonly scans: readonly InstrumentScan[];
  readonly assumed: readonly string[];
  readonly unknownColumns: readonly string[];
}

/** What a sheet that says nothing is taken to mean; each is said in the result [common practice]. */
const USUAL_PATH_MM = 10;
const USUAL_PATH_UNCERTAINTY = 0.001;
const USUAL_CONCENTRATION_UNCERTAINTY = 0.003;

/**
 * One row a scan; which columns it needs depends on its test.
 * @throws TankhueErrors with the problems of every row
 */
export function readVerificationSheet(bytes: Uint8Array, fileName: string, load: SpectrumLoader): VerificationScans {
  return scansOfRows(readSheet(bytes, fileName, VERIFICATION_COLUMNS, ['test', 'file']), load);
}

/** The same from rows that came another way, such as files named one by one with options for their columns. */
export function scansOfRows(sheet: Sheet, load: SpectrumLoader): VerificationScans {
  const assumed = new Set<string>();
  const { rows, problems, unknownColumns } = readRows(sheet, (read) => scanOfRow(read, load, assumed));
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { scans: rows, assumed: [...assumed], unknownColumns };
}

function scanOfRow(read: RowReader, load: SpectrumLoader, assumed: Set<string>): InstrumentScan | null {
  const test = testOf(read);
  const file = needText(read, 'file', 'the file of the scan', 'write its name, relative to the sheet');
  if (test === null || file === null) return null;
  const fetch = (name: string, column: string): Spectrum => load(name, read.text(column), read.where(column));
  try {
    return scanOfTest(test, file, read, fetch, assumed);
  } catch (error) {
    if (!(error instanceof TankhueError)) throw error;
    read.problems.push(error);
    return null;
  }
}

function scanOfTest(
  test: InstrumentTestName,
  file: string,
  read: RowReader,
  fetch: Fetch,
  assumed: Set<string>,
): InstrumentScan | null {
  const scan = MAKERS[test](read, fetch, assumed);
  return scan && read.problems.length === 0
    ? ({ ...scan, ...temperaturesOf(read), test, spectrum: fetch(file, 'column') } as InstrumentScan)
    : null;
}

function temperaturesOf(read: RowReader): Pick<InstrumentScan, 'temperatures'> {
  const celsius = (column: string) => read.number(column, (t) => t > -20 && t < 100, '-20 to 100 °C');
  const scanned = celsius('temperature_C');
  const certified = celsius('certificate_temperature_C');
  if (scanned === null || certified === null) return {};
  return { temperatures: { scanned: kelvinFromCelsius(scanned), certified: kelvinFromCelsius(certified) } };
}

function testOf(read: RowReader): InstrumentTestName | null {
  const text = needText(read, 'test', 'a test', `write one of ${INSTRUMENT_TESTS.join(', ')}`);
  if (text === null) return null;
  const found = INSTRUMENT_TESTS.find((name) => name === text.toLowerCase());
  if (found) return found;
  const near = nearest(text.toLowerCase(), INSTRUMENT_TESTS);
  read.refuse(
    'unknown-test',
    'test',
    `expected one of ${INSTRUMENT_TESTS.join(', ')}; received ${quoted(text)}`,
    near ? `did you mean ${near}?` : 'write the name of the test',
  );
  return null;
}

type Fetch = (name: string, column: string) => Spectrum;
/** What a test needs besides its name and its spectrum; null where the row does not say it. */
type Maker = (read: RowReader, fetch: Fetch, assumed: Set<string>) => Details<InstrumentScan> | null;
type Details<Scan> = Scan extends unknown ? Omit<Scan, 'test' | 'spectrum'> : never;

const nothingMore: Maker = () => ({});

const MAKERS: Readonly<Record<InstrumentTestName, Maker>> = {
  holmium: nothingMore,
  'toluene-hexane': nothingMore,
  blank: (read) => ({ minutes: read.number('minutes') ?? NaN }),
  repeat: (read) => ({ name: read.text('solution') ?? '' }),
  'dichromate-perchloric': dichromate,
  'dichromate-sulfuric': dichromate,
  'cut-off': cutOff,
  'empty-cell': (read) => {
    const path = read.number('path_mm', isAbove0, 'a path above 0 mm');
    return {
      cell: needText(read, 'cell', 'the name of the cell', 'write its engraved number or a name') ?? '',
      nominalPath: path === null ? 0 : centimetresFromMillimetres(path),
      refractiveIndex: read.number('refractive_index', (n) => n >= 1 && n < 3, '1 (air) to 3') ?? 1,
    };
  },
  'filled-cell': (read, fetch) => {
    const cell = needText(read, 'cell', 'the name of the cell', 'write its engraved number or a name');
    const file = needText(
      read,
      'reference_file',
      'a scan of the same solution in a cell of known path',
      'scan it in the 10 mm cell and write the file',
    );
    const path = needNumber(read, 'reference_path_mm', 'the path of that cell');
    if (cell === null || file === null || path === null) return null;
    const u = read.number('reference_path_u_mm', isNotNegative, '0 mm or more');
    return {
      cell,
      reference: fetch(file, 'reference_column'),
      referencePath: inCentimetres(path, u ?? USUAL_PATH_UNCERTAINTY * path),
    };
  },
};

const isAbove0 = (value: number): boolean => value > 0;
const isNotNegative = (value: number): boolean => value >= 0;

const inCentimetres = (value: number, uncertainty: number): MeasuredProperty => ({
  value: centimetresFromMillimetres(value),
  uncertainty: centimetresFromMillimetres(uncertainty),
});

function dichromate(read: RowReader, fetch: Fetch, assumed: Set<string>): Details<DichromateScan> | null {
  const concentration = needNumber(read, 'concentration_mg_L', 'the concentration of potassium dichromate');
  const concentrationU = read.number('concentration_u_mg_L', isNotNegative, '0 mg/L or more');
  const path = read.number('path_mm', isAbove0, 'a path above 0 mm');
  const pathU = read.number('path_u_mm', isNotNegative, '0 mm or more');
  if (concentration === null) return null;
  if (path === null) assumed.add(`dichromate in a ${USUAL_PATH_MM} mm cell, because the sheet does not say`);
  if (pathU === null)
    assumed.add(`cells of dichromate known to ${100 * USUAL_PATH_UNCERTAINTY} % (common practice, no source)`);
  if (concentrationU === null)
    assumed.add(
      `dichromate concentrations known to ${100 * USUAL_CONCENTRATION_UNCERTAINTY} % (common practice, no source)`,
    );
  const blank = read.text('blank_file');
  const millimetres = path ?? USUAL_PATH_MM;
  return {
    concentration: {
      value: concentration,
      uncertainty: concentrationU ?? USUAL_CONCENTRATION_UNCERTAINTY * concentration,
    },
    pathLength: inCentimetres(millimetres, pathU ?? USUAL_PATH_UNCERTAINTY * millimetres),
    blank: blank === null ? null : fetch(blank, 'blank_column'),
  };
}

function cutOff(read: RowReader): Details<CutOffScan> | null {
  const name = read.text('solution');
  const known = name === null ? undefined : CUT_OFF_SOLUTIONS[name];
  const least = read.number('least_A', isAbove0, 'an absorbance above 0');
  if (known)
    return {
      name: known.name,
      opaque: [read.number('from_nm') ?? known.from, read.number('to_nm') ?? known.to],
      least: least ?? known.least,
      limitSource: least === null ? known.source : 'the sheet',
    };
  const from = needNumber(read, 'from_nm', 'where the filter or solution lets nothing through');
  const to = needNumber(read, 'to_nm', 'where the filter or solution lets nothing through');
  const limit = least ?? needNumber(read, 'least_A', 'the absorbance it must reach');
  if (from === null || to === null || limit === null) return null;
  if (!(to > from)) {
    read.refuse(
      'range-empty',
      'to_nm',
      `expected a wavelength above ${from} nm; received ${to} nm`,
      'write the range from low to high',
    );
    return null;
  }
  return { name: name ?? 'cut-off filter', opaque: [from, to], least: limit, limitSource: 'the sheet' };
}

function needText(read: RowReader, column: string, what: string, hint: string): string | null {
  const text = read.text(column);
  if (text === null) read.refuse('cell-empty', column, `expected ${what}; received an empty cell`, hint);
  return text;
}

function needNumber(read: RowReader, column: string, what: string): number | null {
  const isEmpty = read.text(column) === null;
  const value = read.number(column, isAbove0, `${what}, above 0`);
  if (isEmpty)
    read.refuse(
      'cell-empty',
      column,
      `expected ${what} in ${column}; received an empty cell`,
      'this test cannot do without it',
    );
  return value;
}
