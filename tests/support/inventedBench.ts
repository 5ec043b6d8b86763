import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import type { AssayResult } from '../../src/assay/result.ts';
import type { Sample } from '../../src/assay/sample.ts';
import { calibrate } from '../../src/calibration/build.ts';
import type { Calibration } from '../../src/calibration/calibration.ts';
import type { Standard } from '../../src/calibration/standard.ts';
import { amountsOf, newAmounts } from '../../src/electrolyte/forwardModel.ts';
import { PAIRS, speciesOfPair, type Pair, type Side, type Species } from '../../src/electrolyte/species.ts';
import { makeSpectrum } from '../../src/spectrum/spectrum.ts';

// An invented photometer and electrolyte with known truth: smooth bands near those of the real ions (positions and heights rounded from
// published spectra), a complex of K = 0.9 L/mol and a second-order V(V) term.

export const WAVELENGTH = Float64Array.from({ length: 601 }, (_, i) => 400 + i);
export const PATH: Readonly<Record<Pair, number>> = { 'V2/V3': 0.1, 'V3/V4': 0.05, 'V4/V5': 0.02 };
export const SIDE: Readonly<Record<Pair, Side>> = { 'V2/V3': 'negative', 'V3/V4': 'composite', 'V4/V5': 'positive' };

const bands = (...list: readonly (readonly [number, number, number])[]) =>
  WAVELENGTH.map((nm) =>
    list.reduce((sum, [height, centre, width]) => sum + height * Math.exp(-(((nm - centre) / width) ** 2)), 0),
  );

const SPECTRA: Readonly<Record<Species, Float64Array>> = {
  V2: bands([4.3, 562, 60], [3.2, 853, 90], [1, 400, 40]),
  V3: bands([7.5, 610, 60], [9, 415, 32]),
  V4: bands([19.5, 764, 75], [3, 640, 60]),
  V5: bands([14, 400, 38]),
};
const COMPLEX = bands([180, 600, 170], [140, 900, 160]);
const DIMER = bands([20, 425, 40]);
const ASSOCIATIONS = [
  { name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 0.9 },
  { name: '2V5', reactants: { V5: 2 }, associationConstant: 0 },
];

/** Park-Miller with Box-Muller: repeatable chance for tests. */
export function chance(seed: number): { uniform: () => number; normal: () => number } {
  let state = seed;
  const uniform = () => (state = (state * 16807) % 2147483647) / 2147483647;
  return { uniform, normal: () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform()) };
}

export interface Fault {
  readonly offset?: number;
  readonly scatter?: number;
  readonly shift?: number;
  /** part of the light that goes beside the sample */
  readonly bubble?: number;
  readonly stray?: number;
  /** true path over stated path */
  readonly path?: number;
  /** band of water near 970 nm */
  readonly water?: number;
}

/** Absorbance of a composition in the cuvette, faults and noise included. */
export function absorbanceOf(
  pair: Pair,
  lower: number,
  higher: number,
  pathLength: number,
  random: { normal: () => number },
  fault: Fault = {},
  noise = 0.0005,
): Float64Array {
  const associations = pair === 'V4/V5' ? ASSOCIATIONS : [];
  const spectra = [
    ...speciesOfPair(pair).map((species) => SPECTRA[species]),
    ...(associations.length > 0 ? [COMPLEX, DIMER] : []),
  ];
  const { amount } = amountsOf(pair, associations)(lower, higher, newAmounts(spectra.length));
  const last = WAVELENGTH.length - 1;
  return WAVELENGTH.map((nm, i) => {
    const position = Math.min(last, Math.max(0, i - (fault.shift ?? 0)));
    const below = Math.min(last - 1, Math.floor(position));
    let a = 0;
    spectra.forEach((spectrum, k) => {
      a +=
        pathLength *
        (fault.path ?? 1) *
        amount[k]! *
        (spectrum[below]! + (spectrum[below + 1]! - spectrum[below]!) * (position - below));
    });
    if (fault.bubble) a = -Math.log10((1 - fault.bubble) * 10 ** -a + fault.bubble);
    if (fault.stray) a = -Math.log10((10 ** -a + fault.stray) / (1 + fault.stray));
    const water = (fault.water ?? 0) * Math.exp(-(((nm - 970) / 40) ** 2));
    return a + (fault.offset ?? 0) + (fault.scatter ?? 0) * (450 / nm) ** 4 + water + noise * random.normal();
  });
}

/** Thirty-five standards a pair, 0.3 % in concentration and 0.4 % in path. */
export function inventedStandards(seed: number): Standard[] {
  const random = chance(seed);
  return PAIRS.flatMap((pair) =>
    [0.9, 1.2, 1.5, 1.7, 1.9].flatMap((total) =>
      [0.02, 0.18, 0.34, 0.5, 0.66, 0.82, 0.98].map((share): Standard => {
        const [low, high] = speciesOfPair(pair);
        const lower = total * (1 - share);
        const higher = total * share;
        const absorbance = absorbanceOf(
          pair,
          lower * (1 + 0.003 * random.normal()),
          higher * (1 + 0.003 * random.normal()),
          PATH[pair] * (1 + 0.004 * random.normal()),
          random,
        );
        const name = `${pair} ${total} ${share}`;
        return {
          name,
          spectrum: makeSpectrum(name, WAVELENGTH, absorbance, { file: pair, column: name, sha256: '' }),
          pathLength: PATH[pair],
          pathUncertainty: 0.004 * PATH[pair],
          dilution: 1,
          temperature: 298.15,
          concentration: { V2: 0, V3: 0, V4: 0, V5: 0, [low]: lower, [high]: higher },
          concentrationUncertainty: 0.002 * total,
          preparation: `${pair} ${total}`,
          role: 'calibration',
        };
      }),
    ),
  );
}

export const inventedCalibration = (seed: number): Calibration =>
  calibrate({
    name: 'invented',
    source: 'invented',
    standards: inventedStandards(seed),
    provenance: { tool: 'test', command: 'test', sheetSha256: '' },
  });

export function inventedSample(pair: Pair, absorbance: Float64Array, more: Partial<Sample> = {}): Sample {
  return {
    name: 'sample',
    system: 'bench',
    side: SIDE[pair],
    spectrum: makeSpectrum('sample', WAVELENGTH, absorbance),
    blank: 'given',
    pathLength: PATH[pair],
    pathUncertainty: 0.004 * PATH[pair],
    dilution: 1,
    dilutionUncertainty: null,
    temperature: 298.15,
    acid: null,
    takenAt: null,
    scannedAt: null,
    inertGas: null,
    cell: null,
    flask: null,
    ...more,
  };
}

export const assayInvented = (sample: Sample, calibration: Calibration): AssayResult =>
  assaySample(
    sample,
    { calibration, sha256: 'invented', isReference: false },
    { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
  );
