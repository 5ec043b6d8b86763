import type { BlendTarget } from '../bench/mixing/blend.ts';
import { USUAL_PURITY, withPurity, type MeasuredComposition, type Stock } from '../bench/mixing/stock.ts';
import { SPECIES, type Species } from '../electrolyte/species.ts';
import { TankhueError, TankhueErrors, quoted } from '../errors.ts';
import { measured } from '../numerics/measured.ts';
import { nearest } from './nearest.ts';
import { readRows } from './samplesSheet.ts';
import { readSheet, type RowReader } from './sheet.ts';
import { spectrumOfRow, SPECTRUM_COLUMNS } from './standardsSpectrum.ts';

const STATE_COLUMNS = SPECIES.map((species) => `${species}_mol_L`);

/** `acid_mol_L` is the total sulfate, that of dissolved vanadyl sulfate included. */
export const STOCKS_COLUMNS = [
  'stock',
  ...STATE_COLUMNS,
  'u_mol_L',
  'oxidation_u',
  'acid_mol_L',
  'available_mL',
  'density_g_mL',
  'preparation',
  'note',
] as const;

export const TARGETS_COLUMNS = [
  'standard',
  ...STATE_COLUMNS,
  'volume_mL',
  'acid_mol_L',
  ...SPECTRUM_COLUMNS,
  'note',
] as const;

/** Relative uncertainty of a stock about which nobody said anything [common practice]. */
const USUAL_UNCERTAINTY = 0.01;

export interface StocksSheet {
  readonly stocks: readonly Stock[];
  readonly assumed: readonly string[];
  readonly unknownColumns: readonly string[];
}

/** Bottles at hand; a row without vanadium is acid or water. @throws TankhueErrors with the problems of every row */
export function readStocksSheet(bytes: Uint8Array, fileName: string): StocksSheet {
  const sheet = readSheet(bytes, fileName, STOCKS_COLUMNS, ['stock']);
  const assumed: string[] = [];
  const { rows, problems, unknownColumns } = readRows(sheet, (read, row): Stock | null => {
    const name = named(read, 'stock');
    const values = statesOf(read);
    const total = Object.values(values).reduce((sum, value) => sum + value, 0);
    const u = read.number('u_mol_L', (value) => value >= 0, '0 mol/L or more');
    if (u === null && total > 0 && name)
      assumed.push(`${name} known to ${100 * USUAL_UNCERTAINTY} %, because the sheet does not say`);
    const isPure = SPECIES.filter((species) => values[species] > 0).length === 1;
    const purity =
      read.number('oxidation_u', (value) => value >= 0 && value < 1, '0 to 1') ?? (isPure ? USUAL_PURITY : 0);
    const known = Object.fromEntries(
      SPECIES.map((species) => [
        species,
        measured(
          values[species],
          values[species] > 0 ? (u ?? USUAL_UNCERTAINTY * values[species]) : 0,
          `stock ${name}:${species}`,
        ),
      ]),
    ) as Record<Species, MeasuredComposition[Species]>;
    const concentration = total > 0 ? withPurity(known, purity * total, name ?? '') : known;
    const stock = {
      concentration,
      sulfate: read.number('acid_mol_L', (value) => value >= 0 && value <= 18.5, '0 to 18.5 mol/L'),
      available: read.number('available_mL', (value) => value > 0, 'more than 0 mL') ?? Infinity,
      density: read.number('density_g_mL', (value) => value > 0.9 && value < 2, '0.9 to 2 g/mL'),
      preparation: read.text('preparation') ?? name ?? '',
      where: `${fileName}:${row.line}`,
    };
    return name === null ? null : { name, ...stock };
  });
  const repeated = rows.find((stock, i) => rows.findIndex(({ name }) => name === stock.name) !== i);
  const all = repeated ? [...problems, nameRepeats(repeated.name, repeated.where)] : problems;
  if (all.length > 0) throw new TankhueErrors(all as [TankhueError, ...TankhueError[]]);
  return { stocks: rows, assumed, unknownColumns };
}

/** Bottles wanted. @throws TankhueErrors with the problems of every row */
export function readTargetsSheet(
  bytes: Uint8Array,
  fileName: string,
): { targets: BlendTarget[]; unknownColumns: readonly string[] } {
  const sheet = readSheet(bytes, fileName, TARGETS_COLUMNS, ['standard', 'volume_mL']);
  const { rows, problems, unknownColumns } = readRows(sheet, (read): BlendTarget | null => {
    const name = named(read, 'standard');
    const concentration = statesOf(read);
    const volume = read.number('volume_mL', (value) => value > 0, 'more than 0 mL');
    if (volume === null && read.text('volume_mL') === null)
      read.refuse(
        'cell-empty',
        'volume_mL',
        'expected the volume to make; received an empty cell',
        'write the size of the flask in mL',
      );
    const rest = {
      concentration,
      sulfate: read.number('acid_mol_L', (value) => value > 0, 'more than 0 mol/L'),
      spectrum: spectrumOfRow(read),
    };
    return name === null || volume === null ? null : { name, volume, ...rest };
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { targets: [...rows], unknownColumns };
}

/** The stock of a name. @throws TankhueError `stock-unknown` */
export function findStock(stocks: readonly Stock[], name: string, where: string): Stock {
  const found = stocks.find((stock) => stock.name === name);
  if (found) return found;
  const names = stocks.map((stock) => stock.name);
  const near = nearest(name, names);
  throw new TankhueError(
    'stock-unknown',
    `expected one of ${names.slice(0, 10).join(', ')}; received ${quoted(name)}`,
    where,
    near ? `did you mean ${near}?` : 'write the name as on the sheet of stocks',
  );
}

function named(read: RowReader, column: string): string | null {
  const name = read.text(column);
  if (name === null)
    read.refuse(
      'name-missing',
      column,
      `expected a name in ${column}; received an empty cell`,
      'write what stands on the bottle',
    );
  return name;
}

const statesOf = (read: RowReader): Record<Species, number> =>
  Object.fromEntries(
    SPECIES.map((species) => [species, read.number(`${species}_mol_L`, (value) => value >= 0, '0 mol/L or more') ?? 0]),
  ) as Record<Species, number>;

const nameRepeats = (name: string, where: string): TankhueError =>
  new TankhueError(
    'name-repeats',
    `expected every stock to have a name of its own; received ${quoted(name)} twice`,
    where,
    'number the bottles: A-1, A-2',
  );
