import type { StandardsSpectrum } from '../bench/standardsRow.ts';
import type { RowReader } from './sheet.ts';

/** Where the spectrum of a bottle lies, or will lie; copied into its row of the standards sheet. */
export const SPECTRUM_COLUMNS = [
  'spectrum_file',
  'spectrum_column',
  'spectrum_blank_file',
  'spectrum_blank_column',
  'path_mm',
  'path_u_mm',
  'cuvette_dilution',
] as const;

export const spectrumOfRow = (read: RowReader): StandardsSpectrum => ({
  file: read.text('spectrum_file'),
  column: read.text('spectrum_column'),
  blankFile: read.text('spectrum_blank_file'),
  blankColumn: read.text('spectrum_blank_column'),
  path: read.number('path_mm', (value) => value > 0, 'a path above 0 mm'),
  pathUncertainty: read.number('path_u_mm', (value) => value > 0, 'an uncertainty above 0 mm'),
  dilution: read.number('cuvette_dilution', (value) => value >= 1, 'a dilution of 1 or more'),
});
