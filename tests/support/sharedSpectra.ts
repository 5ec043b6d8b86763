import { existsSync, readFileSync } from 'node:fs';
import Papa from 'papaparse';
import type { Standard } from '../../src/calibration/standard.ts';
import { makeSpectrum } from '../../src/spectrum/spectrum.ts';

// 99 real spectra: A. A. Maurice, A. E. Quintero, M. Vera, Electrochimica Acta 2024, 144003, open data, MIT.
const FOLDER = new URL('../../../shared/spectra/', import.meta.url);

/** Tests on real spectra are skipped, and say so, where the data do not lie beside the project. */
export const sharedSpectraPresent = existsSync(FOLDER);

const table = (name: string): string[][] =>
  Papa.parse<string[]>(readFileSync(new URL(name, FOLDER), 'utf8'), { skipEmptyLines: true }).data;

let cached: Standard[] | null = null;

/** The shared standards as the sheet beside them describes them. */
export function sharedStandards(): Standard[] {
  if (cached) return cached;
  const [header, ...rows] = table('standards.csv') as [string[], ...string[][]];
  const files = new Map<string, string[][]>();
  cached = rows.map((cells) => {
    const row = Object.fromEntries(header.map((name, i) => [name, cells[i]!])) as Record<string, string>;
    const file = row['file']!;
    if (!files.has(file)) files.set(file, table(file));
    const [names, ...points] = files.get(file) as [string[], ...string[][]];
    const column = names.indexOf(row['column']!);
    const number = (name: string): number => Number(row[name]);
    return {
      name: row['standard']!,
      spectrum: makeSpectrum(
        row['standard']!,
        Float64Array.from(points, (point) => Number(point[0])),
        Float64Array.from(points, (point) => Number(point[column])),
        { file, column: row['column']!, sha256: '' },
      ),
      pathLength: number('path_mm') / 10,
      pathUncertainty: null,
      dilution: number('dilution'),
      temperature: null,
      concentration: {
        V2: number('V2_mol_L'),
        V3: number('V3_mol_L'),
        V4: number('V4_mol_L'),
        V5: number('V5_mol_L'),
      },
      concentrationUncertainty: null,
      preparation: null,
      role: 'calibration',
    };
  });
  return cached;
}

export const totalOf = (standard: Standard): number =>
  Object.values(standard.concentration).reduce((sum, value) => sum + value, 0);
