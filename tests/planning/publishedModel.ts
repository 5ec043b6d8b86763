import type { MeasurementModel } from '../../src/bench/planning/measurementModel.ts';
import type { PhotometerTraits } from '../../src/bench/planning/cuvetteDesign.ts';
import type { PairModel } from '../../src/estimation/pairModel.ts';
import type { Pair } from '../../src/electrolyte/species.ts';
import { amountsOf } from '../../src/electrolyte/forwardModel.ts';

// Molar absorption coefficients, L/(mol·cm), of vanadium in sulfuric acid, fitted to the open spectra of A. A. Maurice,
// A. E. Quintero, M. Vera, Electrochimica Acta 2024, 144003 (MIT); excess of the V(IV)·V(V) complex for K = 0.9 L/mol.
const NM = [430, 450, 470, 500, 546, 572, 610, 700, 764, 853, 900];
const EPSILON = {
  V2: [0.97, 0.9, 1.14, 2.12, 4.27, 4.36, 3.05, 1.04, 2.1, 3.22, 2.8],
  V3: [8.37, 5.32, 2.67, 1.9, 4.19, 6.13, 7.57, 2.51, 0.4, 0.02, 0.01],
  V4: [0.05, 0.08, 0.1, 0.3, 1.65, 3.63, 7.7, 15.4, 19.9, 10.6, 4.7],
  V5: [10.96, 4.93, 2.49, 0.83, 0.4, 0, 0, 0.4, 1, 1, 0.5],
  complex: [39, 57, 77, 112, 175, 192, 176, 173, 159, 171, 160],
};

const wavelength = Float64Array.from({ length: 95 }, (_, i) => 430 + 5 * i);
const onGrid = (values: readonly number[]) =>
  wavelength.map((nm) => {
    const i = Math.max(
      1,
      NM.findIndex((each) => each >= nm),
    );
    const share = (nm - NM[i - 1]!) / (NM[i]! - NM[i - 1]!);
    return values[i - 1]! * (1 - share) + values[i]! * share;
  });

/** Without patterns and calibration errors: what is left is the photometer. */
export function publishedPairModel(pair: Pair): PairModel {
  const [lower, higher] = pair.split('/') as ['V2', 'V3'];
  const isComplexed = pair === 'V4/V5';
  const spectra = [onGrid(EPSILON[lower]), onGrid(EPSILON[higher]), ...(isComplexed ? [onGrid(EPSILON.complex)] : [])];
  return {
    pair,
    wavelength,
    associations: isComplexed ? [{ name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 0.9 }] : [],
    spectra,
    noise: 0.0005,
    modes: [],
    designInverse: new Float64Array(spectra.length ** 2),
  };
}

export function publishedModel(pair: Pair): MeasurementModel {
  const { spectra, associations, noise } = publishedPairModel(pair);
  return {
    pair,
    wavelength,
    spectra,
    amounts: amountsOf(pair, associations),
    boundLower: associations.map(() => 1),
    noise,
    patterns: [],
    brightest: 3,
    standardTotals: [0.01, 2],
    designInverse: new Float64Array(spectra.length ** 2),
    betweenGroup: { share: 0, total: 0 },
  };
}

export const PHOTOMETER: PhotometerTraits = {
  noise: { constant: 0.0005, shot: 0.0002 },
  pointsAveraged: 5,
  strayLight: 0.0005,
  priors: { offset: 0.002, slope: 0.0005, scatter: 0.001, wavelengthShift: 0.3 },
  ceiling: 2,
};
