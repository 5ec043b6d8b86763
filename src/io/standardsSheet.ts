import { TankhueError, TankhueErrors } from '../errors.ts';
import type { Standard } from '../calibration/standard.ts';
import { SPECIES, type Species } from '../electrolyte/species.ts';
import { CUVETTE_COLUMNS, cuvetteCells } from './cuvetteCells.ts';
import { readSheet, RowReader } from './sheet.ts';

export const STANDARDS_COLUMNS = [
  'standard',
  ...CUVETTE_COLUMNS,
  ...SPECIES.map((species) => `${species}_mol_L`),
  'u_mol_L',
  'preparation',
  'role',
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
    const cuvette = cuvetteCells(read, {
      column: 'standard',
      example: 'number the fillings: A-1, A-2',
      repeat: 'number the fillings: A-1, A-2',
      seen,
    });
    if (cuvette.pathLength === null && read.text('path_mm') === null)
      read.refuse(
        'path-unknown',
        'path_mm',
        'expected the path of the standard; received an empty cell',
        'write the number engraved on the cell, in mm',
      );
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
    const result: StandardsRow = {
      ...cuvette,
      pathLength: cuvette.pathLength ?? NaN,
      dilution: cuvette.dilution ?? 1,
      concentration,
      concentrationUncertainty: uncertainty,
      preparation: read.text('preparation'),
      role: role === 'check' ? 'check' : 'calibration',
      where: `${fileName}:${row.line}`,
    };
    problems.push(...read.problems);
    return result;
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { rows, unknownColumns: sheet.unknownColumns };
}
