import { speciesOfPair, type Species } from '../electrolyte/species.ts';
import type { FaultShape } from './faults.ts';
import type { PairModel } from './pairModel.ts';
import type { Prepared } from './prepare.ts';

/** Spectrum of a species that cannot live beside a pair, on that pair's axis: L/(mol·cm); NaN where its own calibration does not reach. */
export interface ForeignSpectrum {
  readonly species: Species;
  readonly molarAbsorptivity: Float64Array;
}

/** One fault direction per foreign species, amplitude in mol/L in the cuvette; species whose spectrum has gaps on the used axis are left out. */
export function foreignFaults(
  prepared: Prepared,
  pathLength: number,
  foreign: readonly ForeignSpectrum[],
): FaultShape[] {
  return foreign
    .map(({ species, molarAbsorptivity }) => ({
      name: species,
      unit: 'mol/L',
      shape: Float64Array.from(prepared.used, (i) => pathLength * molarAbsorptivity[i]!),
    }))
    .filter(({ shape }) => shape.every(Number.isFinite));
}

/** Spectra of the species that must not be in `model`, from the other pairs of a calibration, by linear interpolation. */
export function foreignSpectra(model: PairModel, all: readonly PairModel[]): ForeignSpectrum[] {
  const own = speciesOfPair(model.pair);
  const seen = new Set<Species>(own);
  return all.flatMap((other) =>
    speciesOfPair(other.pair).flatMap((species, index): ForeignSpectrum[] => {
      if (seen.has(species)) return [];
      seen.add(species);
      return [{ species, molarAbsorptivity: interpolated(other.wavelength, other.spectra[index]!, model.wavelength) }];
    }),
  );
}

/** Linear interpolation, NaN outside. */
function interpolated(from: Float64Array, values: Float64Array, at: Float64Array): Float64Array {
  let i = 0;
  return at.map((nm) => {
    while (i < from.length - 2 && from[i + 1]! < nm) i++;
    if (nm < from[0]! || nm > from.at(-1)!) return NaN;
    const share = (nm - from[i]!) / (from[i + 1]! - from[i]!);
    return values[i]! * (1 - share) + values[i + 1]! * share;
  });
}
