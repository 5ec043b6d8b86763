import { TankhueError } from '../errors.ts';
import type { InstrumentRecord } from './instrumentRecord.ts';
import { DEFAULT_ASSAY_OPTIONS } from './assaySample.ts';
import type { AssayOptions } from './sample.ts';

/** Absorbance at which a share of stray light takes 2 % off a reading: 10^(−A) = s(10^(A/50) − 1) solved near A, never above 3. */
function ceilingFor(strayLight: number): number {
  let absorbance = 3;
  while (absorbance > 0.5 && strayLight * (10 ** absorbance - 1) > 10 ** (0.02 * absorbance) - 1) absorbance -= 0.01;
  return absorbance;
}

/**
 * What a checked photometer tells an assay: its own scatter of baseline and wavelength as priors, and how dark it can see.
 * @throws TankhueError `instrument-failed` where the record says the instrument failed its check
 */
export function optionsFromInstrument(record: InstrumentRecord, where: string): AssayOptions {
  if (record.state === 'failed')
    throw new TankhueError(
      'instrument-failed',
      'expected a photometer that passed its check; received one that failed',
      where,
      'mend what the check names first; without --instrument the usual priors are taken',
    );
  const { priors, ceiling } = DEFAULT_ASSAY_OPTIONS;
  return {
    ...DEFAULT_ASSAY_OPTIONS,
    priors: {
      ...priors,
      offset: Math.max(record.offsetPrior ?? priors.offset, 1e-5),
      slope: Math.max(record.slopePrior ?? priors.slope, 1e-5),
      wavelengthShift: record.wavelengthShift
        ? Math.max(Math.hypot(record.wavelengthShift.value, record.wavelengthShift.uncertainty), 0.02)
        : priors.wavelengthShift,
    },
    ceiling: record.strayLight && record.strayLight.value > 0 ? ceilingFor(record.strayLight.value) : ceiling,
  };
}
