import { centimetresFromMillimetres, kelvinFromCelsius } from '../units.ts';
import type { RowReader } from './sheet.ts';

/** Columns that say the same of any cuvette, sample or standard. */
export const CUVETTE_COLUMNS = [
  'file',
  'column',
  'blank_file',
  'blank_column',
  'path_mm',
  'path_u_mm',
  'dilution',
  'temperature_C',
  'acid_mol_L',
] as const;

/** A cuvette as a sheet describes it. Null: nobody said. */
export interface CuvetteCells {
  /** empty where it was refused */
  readonly name: string;
  readonly file: string;
  readonly column: string | null;
  readonly blankFile: string | null;
  readonly blankColumn: string | null;
  /** cm */
  readonly pathLength: number | null;
  /** cm */
  readonly pathUncertainty: number | null;
  /** ≥ 1 */
  readonly dilution: number | null;
  /** K */
  readonly temperature: number | null;
  /** mol/L */
  readonly acid: number | null;
}

/** How a sheet calls its rows. */
export interface RowNames {
  /** the column with the name of each row */
  readonly column: string;
  /** what to write where there is none */
  readonly example: string;
  /** what to do where two rows have one */
  readonly repeat: string;
  /** names of the rows so far */
  readonly seen: Set<string>;
}

function nameOf(read: RowReader, { column, example, repeat, seen }: RowNames): string {
  const name = read.text(column);
  if (name === null)
    read.refuse('name-missing', column, `expected a name for the ${column}; received an empty cell`, example);
  else if (seen.has(name))
    read.refuse(
      'name-repeats',
      column,
      `expected every ${column} to have a name of its own; received "${name}" twice`,
      repeat,
    );
  else seen.add(name);
  return name ?? '';
}

/** Refusals are kept by `read`. */
export function cuvetteCells(read: RowReader, names: RowNames): CuvetteCells {
  const name = nameOf(read, names);
  const file = read.text('file');
  if (file === null)
    read.refuse(
      'file-missing',
      'file',
      'expected the file of the spectrum; received an empty cell',
      'write its name, relative to the sheet',
    );
  const path = read.number('path_mm', (value) => value > 0, 'a path above 0 mm');
  const pathUncertainty = read.number('path_u_mm', (value) => value >= 0, '0 mm or more');
  const temperature = read.number('temperature_C', (value) => value > -20 && value < 100, '-20 to 100 °C');
  return {
    name,
    file: file ?? '',
    column: read.text('column'),
    blankFile: read.text('blank_file'),
    blankColumn: read.text('blank_column'),
    pathLength: path === null ? null : centimetresFromMillimetres(path),
    pathUncertainty: pathUncertainty === null ? null : centimetresFromMillimetres(pathUncertainty),
    dilution: read.number('dilution', (value) => value >= 1, 'a dilution of 1 or more'),
    temperature: temperature === null ? null : kelvinFromCelsius(temperature),
    acid: read.number('acid_mol_L', (value) => value > 0, 'more than 0 mol/L'),
  };
}
