// What        Which part of the measurement moved together with the check standard: each fitted mode's mean during the alarm
//             against its own baseline.
// Equation    z = (mean of the alarm − mean of the baseline) / (s √(1/n_alarm + 1/n_baseline)); past the two-sided normal
//             quantile at 1 % shared between all modes (Bonferroni) the mode has moved.
// Why so      a suggestion, not a proof: a mode that moved at the same time is the first place to look.
// Valid for   5 baseline values of a mode or more that are not all the same; others are passed over.
// Units       z has none; modes are in units of their own.
// Source      ours; the likely causes are those of common practice.
import { normalQuantile } from '../../numerics/distributions.ts';
import { mean, standardDeviation } from '../../numerics/meanAndDeviation.ts';
import type { CheckPoint } from './checkLog.ts';

/** By the names an assay gives its fitted effects. */
const LIKELY_CAUSE: Readonly<Record<string, string>> = {
  offset: 'blank, dirty or scratched windows, cell turned round: clean the cell, scan a new blank',
  slope: 'lamp or baseline drift: let the lamp warm up, scan a new blank',
  'fine scatter': 'dust, bubbles or turbidity: filter, let settle, refill',
  'coarse scatter': 'dirty cell or large particles: clean the cell, let settle, refill',
  'light beside the sample': 'bubble, half-filled cell or stray light: refill, then verify the photometer',
  bandwidth: 'slit or optical resolution: check the slit setting',
  wavelength: 'wavelength axis: scan holmium oxide solution and verify the photometer',
  path: 'cell or filling: same cell? filled to the brim? measure its path',
  dilution: 'glassware or a dilution slip: dilute again',
  'stray light': 'stray light: verify with a cut-off solution, look for a lid left open',
  temperature: 'temperature of the cell: wait, then scan again',
};

export interface MovedMode {
  readonly mode: string;
  /** in standard errors of the difference */
  readonly z: number;
  /** mean of the alarm minus mean of the baseline, in the mode's own unit */
  readonly change: number;
  readonly likelyCause: string;
}

/** @returns the modes that moved, the strongest first */
export function movedModes(
  modeNames: readonly string[],
  baseline: readonly CheckPoint[],
  alarm: readonly CheckPoint[],
): MovedMode[] {
  if (modeNames.length === 0) return [];
  const limit = normalQuantile(1 - 0.01 / (2 * modeNames.length));
  return modeNames
    .flatMap((mode) => {
      const before = valuesOf(baseline, mode);
      const during = valuesOf(alarm, mode);
      if (before.length < 5 || during.length === 0) return [];
      const centre = mean(before);
      const spread = standardDeviation(before);
      if (spread === 0) return [];
      const change = mean(during) - centre;
      const z = change / (spread * Math.sqrt(1 / during.length + 1 / before.length));
      return Math.abs(z) > limit ? [{ mode, z, change, likelyCause: LIKELY_CAUSE[mode] ?? `look at ${mode}` }] : [];
    })
    .sort((a, b) => Math.abs(b.z) - Math.abs(a.z));
}

const valuesOf = (points: readonly CheckPoint[], mode: string): number[] =>
  points.map((point) => point.modes[mode] ?? NaN).filter((value) => !Number.isNaN(value));
