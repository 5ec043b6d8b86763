import { existsSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { readFileBytes, readSpectraFile, sha256Of } from '../../src/io/files.ts';
import { findColumn } from '../../src/io/spectra.ts';
import { readStandardsSheet } from '../../src/io/standardsSheet.ts';

// Real spectra, open data (MIT): A. A. Maurice et al., Electrochim. Acta 2024, 144003, doi 10.1016/j.electacta.2024.144003.
const FOLDER = '../shared/spectra';
const present = existsSync(FOLDER);

describe.skipIf(!present)('real spectra in ../shared/spectra (skipped where they are not)', () => {
  const files = present ? readdirSync(FOLDER).filter((name) => /^V\d-V\d-.*\.csv$/.test(name)) : [];

  test('there are nine', () => expect(files).toHaveLength(9));

  test.each(files)('%s holds eleven spectra of 3648 points in absorbance', (name) => {
    const { spectra, understood, sha256 } = readSpectraFile(join(FOLDER, name));
    expect(understood).toMatchObject({ layout: 'columns', separator: 'comma', decimal: 'point', headerLines: 1 });
    expect(spectra).toHaveLength(11);
    for (const one of understood.spectra)
      expect(one).toMatchObject({
        points: 3648,
        direction: 'rising',
        axisUnit: 'nm',
        unit: 'A',
        missing: 0,
        overRange: 0,
      });
    expect(spectra[0]!.wavelength[0]).toBe(345.271);
    expect(spectra[0]!.origin.sha256).toBe(sha256);
    expect(sha256).toBe(sha256Of(readFileBytes(join(FOLDER, name))));
  });

  test('the sheet of standards names 99 columns that are there', () => {
    const path = join(FOLDER, 'standards.csv');
    const { rows, unknownColumns } = readStandardsSheet(readFileBytes(path), path);
    expect([rows.length, unknownColumns.length]).toEqual([99, 0]);
    for (const row of rows) {
      const file = join(FOLDER, row.file);
      expect(findColumn(readSpectraFile(file).spectra, row.column, row.where).origin).toMatchObject({
        file,
        column: row.column,
      });
    }
  });
});
