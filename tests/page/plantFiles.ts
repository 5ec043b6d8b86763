import { readFileSync } from 'node:fs';
import { parseCalibration, seededRandom, simulateSpectrum, spectraCsv, type Spectrum } from '../../src/index.ts';

export const REFERENCE_TEXT = readFileSync('calibration/reference.json', 'utf8');
const reference = parseCalibration(REFERENCE_TEXT);

/** An invented cuvette, every nanometre from 430 to 950 nm. */
export const spectrum = (
  name: string,
  concentration: Readonly<Record<string, number>>,
  pathLength: number,
  seed = 1,
): Spectrum =>
  simulateSpectrum(
    reference,
    {
      name,
      concentration,
      pathLength,
      wavelength: Float64Array.from({ length: 521 }, (_, i) => 430 + i),
      noise: { constant: 0.0005 },
    },
    seededRandom(seed),
  );

/** A plant that lost electrons and whose vanadium crept over. */
export const plantFiles = (): Record<'neg.csv' | 'pos.csv' | 'tanks.csv', string> => ({
  'neg.csv': spectraCsv([spectrum('n', { V2: 0.7, V3: 0.85 }, 0.1)]),
  'pos.csv': spectraCsv([spectrum('p', { V4: 0.7, V5: 0.95 }, 0.02, 2)]),
  'tanks.csv': [
    'sample,system,side,file,column,path_mm,dilution,volume_L,temperature_C,cells_in_series',
    'N-1,quay,negative,neg.csv,,1,1,930,25,20',
    'P-1,quay,positive,pos.csv,,0.2,1,1070,25,20',
    '',
  ].join('\n'),
});
