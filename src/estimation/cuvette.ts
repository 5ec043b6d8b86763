import { millimetresFromCentimetres } from '../units.ts';

/**
 * Relative standard uncertainty of a path when nobody stated one: 3 % up to 0.2 mm (from filling to filling), 1.5 % up to 0.5 mm,
 * 1 % above. Common practice, no source; the thin-cell figure agrees with published spectra of 0.1 mm fillings (3 to 6 %).
 * @param pathLength cm
 */
export function assumedPathUncertainty(pathLength: number): number {
  const millimetres = millimetresFromCentimetres(pathLength);
  if (millimetres <= 0.2) return 0.03;
  return millimetres <= 0.5 ? 0.015 : 0.01;
}

/** Absorbance above which a photometer's reading is not used unless it was verified: 0.1 % stray light takes 2 % off at 2 (common practice, no source). */
export const DEFAULT_CEILING = 2;
