// What        The independent causes of error of one assay and the signed effect of each on both concentrations.
// Equation    effect = G·g for a mode g of one standard deviation, G = H⁻¹JᵀΣ^(−½) the gain of the estimate; pairs of effects (a Cholesky
//             factor) where a cause has two directions. Σ effect·effectᵀ is the covariance.
// Why so      Kept as effects, not as a covariance, errors that two samples share (cell, flask, calibration) stay shared when two tanks
//             are compared, and the budget is the same sum taken apart.
// Valid for   the linear range around the solution.
// Units       mol/L of the tank.
// Source      JCGM 100, 5.2 and annex F.1.2.3 (common causes).
import type { ErrorSource } from './result.ts';
import { speciesOfPair } from '../electrolyte/species.ts';
import { whitenedJacobian } from '../estimation/faults.ts';
import { spectralCovariance } from '../estimation/uncertainty.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { whiten } from '../estimation/prepare.ts';
import type { PairFitOfSample } from './pairFit.ts';
import { ASSUMED_DILUTION_UNCERTAINTY, type Sample } from './sample.ts';

type Effect = readonly [number, number];

/**
 * @param calibrationKey identifies the calibration, so that its errors stay common to results that used it
 * @returns effects at the given dilution, mol/L of the tank
 */
export function errorSourcesOf(
  fit: PairFitOfSample,
  sample: Sample,
  dilution: number,
  calibrationKey: string,
): ErrorSource[] {
  const { prepared, solution, cuvette, pairCalibration, brightness } = fit;
  const leverage = fit.leverage * brightness ** 2;
  const jacobian = whitenedJacobian(prepared, solution, cuvette.pathLength);
  const gain = (row: Float64Array): Effect => {
    const pull = jacobian.map((column) => dot(column, row));
    const of = (c: 0 | 1): number => pull.reduce((sum, value, p) => sum + solution.covariance[c * 4 + p]! * value, 0);
    return [of(0), of(1)];
  };
  const modeEffect = (shape: Float64Array, scale: number): Effect => {
    const [a, b] = gain(
      whiten(
        prepared.whitening,
        Float64Array.from(prepared.used, (i) => shape[i]! * scale),
      ),
    );
    return [a, b];
  };
  const { file, column } = sample.spectrum.origin;
  const own = [sample.name, file, column].filter(Boolean).join('|');
  const [lower, higher] = speciesOfPair(prepared.model.pair);
  const sources: ErrorSource[] = [];
  const add = (source: string, key: string, [a, b]: Effect): void => {
    if (a === 0 && b === 0) return;
    sources.push({ source, key, effect: { [lower]: a * dilution, [higher]: b * dilution } });
  };
  const addPair = (source: string, key: string, covariance: readonly [number, number, number]): void =>
    factor(covariance).forEach((effect, j) => add(source, `${key}:${j + 1}`, effect));

  const named = prepared.named.map((mode) => ({ mode, effect: modeEffect(mode.shape, mode.prior) }));
  for (const { mode, effect } of named) add(mode.name, `${mode.name}:${own}`, effect);
  const unnamed = sumOfSquares(prepared.model.modes.map((mode) => modeEffect(mode, brightness)));
  addPair('pattern of the standards', `pattern:${own}`, unnamed);
  const spectral = spectralCovariance(solution);
  const known = sumOfSquares(named.map(({ effect }) => effect));
  addPair('noise', `noise:${own}`, [
    spectral[0]! - unnamed[0] / brightness ** 2 - known[0],
    spectral[1]! - unnamed[1] / brightness ** 2 - known[1],
    spectral[3]! - unnamed[2] / brightness ** 2 - known[2],
  ]);
  const [, , byPath, byShift] = jacobian as [Float64Array, Float64Array, Float64Array, Float64Array];
  add('path', sample.cell ? `path:cell ${sample.cell}` : `path:${own}`, scaled(gain(byPath), cuvette.pathUncertainty));
  add('wavelength scale', 'wavelength scale', scaled(gain(byShift), cuvette.wavelengthUncertainty));
  addPair('calibration spectra', `calibration spectra:${calibrationKey}`, [
    leverage * spectral[0]!,
    leverage * spectral[1]!,
    leverage * spectral[3]!,
  ]);
  const total = solution.lower + solution.higher;
  const { betweenGroup, labelUncertainty } = pairCalibration;
  const carried = Math.sqrt(fit.leverage);
  add('labels of the standards', `label shares:${calibrationKey}`, [
    -total * carried * labelUncertainty.share,
    total * carried * labelUncertainty.share,
  ]);
  add(
    'labels of the standards',
    `label totals:${calibrationKey}`,
    scaled([solution.lower, solution.higher], carried * labelUncertainty.total),
  );
  add('between preparations, state of charge', `between S:${calibrationKey}`, [
    -total * betweenGroup.share,
    total * betweenGroup.share,
  ]);
  add(
    'between preparations, total',
    `between total:${calibrationKey}`,
    scaled([solution.lower, solution.higher], betweenGroup.total),
  );
  const dilutionUncertainty = dilution === 1 ? 0 : (sample.dilutionUncertainty ?? ASSUMED_DILUTION_UNCERTAINTY);
  add(
    'dilution',
    sample.flask ? `dilution:flask ${sample.flask}` : `dilution:${own}`,
    scaled([solution.lower, solution.higher], dilutionUncertainty),
  );
  return sources;
}

const scaled = ([a, b]: Effect, by: number): Effect => [a * by, b * by];

function sumOfSquares(effects: readonly Effect[]): [number, number, number] {
  const sum: [number, number, number] = [0, 0, 0];
  for (const [a, b] of effects) {
    sum[0] += a * a;
    sum[1] += a * b;
    sum[2] += b * b;
  }
  return sum;
}

/** Cholesky columns of [aa, ab; ab, bb]; what rounding made negative is zero. */
function factor([aa, ab, bb]: readonly [number, number, number]): Effect[] {
  if (!(aa > 0)) return [[0, Math.sqrt(Math.max(0, bb))]];
  const root = Math.sqrt(aa);
  return [
    [root, ab / root],
    [0, Math.sqrt(Math.max(0, bb - (ab * ab) / aa))],
  ];
}

/**
 * What repeated fillings scatter beyond what the budget of one filling already holds; nothing where the budget is the larger. Without this
 * a plant whose people fill cells unevenly would be promised too much.
 */
export function repeatabilityBeyond(
  sources: readonly ErrorSource[],
  fit: PairFitOfSample,
  sample: Sample,
  dilution: number,
  precision: { readonly stateOfCharge: number; readonly totalVanadium: number },
): ErrorSource[] {
  const [lower, higher] = speciesOfPair(fit.prepared.model.pair);
  const low = fit.solution.lower * dilution;
  const high = fit.solution.higher * dilution;
  const total = low + high;
  let shareVariance = 0;
  let totalVariance = 0;
  for (const { key, effect } of sources) {
    if (!key.includes(sample.name)) continue;
    const a = effect[lower] ?? 0;
    const b = effect[higher] ?? 0;
    shareVariance += ((low * b - high * a) / total ** 2) ** 2;
    totalVariance += ((a + b) / total) ** 2;
  }
  const share = Math.sqrt(Math.max(0, precision.stateOfCharge ** 2 - shareVariance));
  const relative = Math.sqrt(Math.max(0, precision.totalVanadium ** 2 - totalVariance));
  const own = `repeatability:${sample.name}`;
  return [
    { source: 'repeatability', key: `${own}:S`, effect: { [lower]: -total * share, [higher]: total * share } },
    { source: 'repeatability', key: `${own}:total`, effect: { [lower]: low * relative, [higher]: high * relative } },
  ].filter(({ effect }) => Object.values(effect).some((value) => value !== 0));
}
