import { TankhueError, TankhueErrors } from '../errors.ts';
import type { Standard } from '../calibration/standard.ts';
import { SPECIES, type Species } from '../electrolyte/species.ts';
import { centimetresFromMillimetres, kelvinFromCelsius } from '../units.ts';
import { readSheet, RowReader } from './sheet.ts';

export const STANDARDS_COLUMNS = [
  'standard',
  'file',
  'column',
  'blank_file',
  'blank_column',
  'path_mm',
  'path_u_mm',
  'dilution',
  'temperature_C',
  ...SPECIES.map((species) => `${species}_mol_L`),
  'u_mol_L',
  'preparation',
  'role',
  'acid_mol_L',
] as const;

/** A row of a standards sheet: a standard without its spectrum yet. */
export interface StandardsRow extends Omit<Standard, 'spectrum'> {
  readonly file: string;
  readonly column: string | null;
  readonly blankFile: string | null;
  readonly blankColumn: string | null;
  readonly acid: number | null;
  readonly where: string;
}

/** @throws TankhueError(s) with every problem of the sheet at once */
export function readStandardsSheet(
  bytes: Uint8Array,
  fileName: string,
): { rows: StandardsRow[]; unknownColumns: readonly string[] } {
  const sheet = readSheet(bytes, fileName, STANDARDS_COLUMNS, ['standard', 'file', 'path_mm']);
  const problems: TankhueError[] = [];
  const seen = new Set<string>();
  const rows = sheet.rows.map((row): StandardsRow => {
    const read = new RowReader(row, sheet.decimalComma);
    const name = read.text('standard') ?? '';
    if (name === '')
      read.refuse(
        'name-missing',
        'standard',
        'expected a name for the standard; received an empty cell',
        'number the fillings: A-1, A-2',
      );
    else if (seen.has(name))
      read.refuse(
        'name-repeats',
        'standard',
        `expected every standard to have a name of its own; received "${name}" twice`,
        'number the fillings: A-1, A-2',
      );
    seen.add(name);
    const file = read.text('file');
    if (file === null)
      read.refuse(
        'file-missing',
        'file',
        'expected the file of the spectrum; received an empty cell',
        'write its name, relative to the sheet',
      );
    const pathLength = read.number('path_mm', (value) => value > 0, 'a path above 0 mm');
    if (pathLength === null && read.text('path_mm') === null)
      read.refuse(
        'path-unknown',
        'path_mm',
        'expected the path of the standard; received an empty cell',
        'write the number engraved on the cell, in mm',
      );
    const pathUncertainty = read.number('path_u_mm', (value) => value > 0, 'an uncertainty above 0 mm');
    const uncertainty = read.number('u_mol_L', (value) => value > 0, 'an uncertainty above 0 mol/L');
    const concentration = Object.fromEntries(
      SPECIES.map((species) => [
        species,
        read.number(`${species}_mol_L`, (value) => value >= 0, '0 mol/L or more') ?? 0,
      ]),
    ) as Record<Species, number>;
    const role = read.text('role') ?? 'calibration';
    if (role !== 'calibration' && role !== 'check')
      read.refuse(
        'role-unknown',
        'role',
        `expected calibration or check; received "${role}"`,
        'write check for a standard that only tests the calibration',
      );
    const temperature = read.number('temperature_C', (value) => value > -20 && value < 100, '-20 to 100 °C');
    const result: StandardsRow = {
      name,
      file: file ?? '',
      column: read.text('column'),
      blankFile: read.text('blank_file'),
      blankColumn: read.text('blank_column'),
      pathLength: centimetresFromMillimetres(pathLength ?? NaN),
      pathUncertainty: pathUncertainty === null ? null : centimetresFromMillimetres(pathUncertainty),
      dilution: read.number('dilution', (value) => value >= 1, 'a dilution of 1 or more') ?? 1,
      temperature: temperature === null ? null : kelvinFromCelsius(temperature),
      concentration,
      concentrationUncertainty: uncertainty,
      preparation: read.text('preparation'),
      role: role === 'check' ? 'check' : 'calibration',
      acid: read.number('acid_mol_L', (value) => value > 0, 'more than 0 mol/L'),
      where: `${fileName}:${row.line}`,
    };
    problems.push(...read.problems);
    return result;
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { rows, unknownColumns: sheet.unknownColumns };
}
