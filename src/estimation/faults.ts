// What        How strongly a spectrum asks for a systematic effect that has a name.
// Equation    r = Σ^(−½)(A − fit), m whitened shape of the effect, I = mᵀm − mᵀJ H⁻¹ Jᵀm; amplitude â = mᵀr/I, score z = mᵀr/√I.
// Why so      The efficient score test of one more free direction: standard normal when the effect is no larger than the model allows for,
//             whatever the composition, and one dot product instead of one more fit. Effects that are unknowns of the fit with a prior
//             (path, wavelength) are the same test in closed form: z = θ̂/√(prior² − posterior²).
// Valid for   effects small enough to be linear; large ones still show, their amplitude is then a lower bound.
// Units       amplitude in the effect's own unit; share effect 1 (state of charge points / 100).
// Source      Rao's score test; directions for light beside the sample from A = −log₁₀((1 − f)10^(−A) + f).
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { shiftedByOneNanometre, whiten, type Prepared } from './prepare.ts';
import type { CuvettePriors, Solution } from './solve.ts';

export interface FaultScore {
  readonly name: string;
  readonly unit: string;
  readonly amplitude: number;
  readonly uncertainty: number;
  /** standard normal where all is well */
  readonly score: number;
  /** what leaving the effect unmodelled does to the share of the higher species */
  readonly shareEffect: number;
}

/** A direction to be tried: absorbance per unit of amplitude on the used wavelengths. */
export interface FaultShape {
  readonly name: string;
  readonly unit: string;
  readonly shape: Float64Array;
}

/** Fitted absorbance on the used wavelengths, and what each absorbing amount contributes to it. */
export function fittedCurve(
  prepared: Prepared,
  solution: Solution,
  pathLength: number,
): { total: Float64Array; shares: Float64Array[]; shifted: Float64Array } {
  const { model, used, amountCount } = prepared;
  const { amount } = prepared.amounts(solution.lower, solution.higher, newAmounts(amountCount));
  const scale = pathLength * Math.exp(solution.pathShift);
  const total = new Float64Array(used.length);
  const shifted = new Float64Array(used.length);
  const shares = model.spectra.map((spectrum, k) => {
    const slope = shiftedByOneNanometre(model.wavelength, spectrum);
    return Float64Array.from(used, (i, l) => {
      shifted[l]! += scale * amount[k]! * slope[i]!;
      const value = scale * amount[k]! * (spectrum[i]! + solution.wavelengthShift * slope[i]!);
      total[l]! += value;
      return value;
    });
  });
  return { total, shares, shifted };
}

/** Shapes that every cuvette can show, at the fitted absorbance. */
export function cuvetteFaults(prepared: Prepared, fitted: Float64Array): FaultShape[] {
  const { used, model, named } = prepared;
  const onUsed = (row: Float64Array): Float64Array => Float64Array.from(used, (i) => row[i]!);
  return [
    ...named.map((mode) => ({ name: mode.name, unit: mode.unit, shape: onUsed(mode.shape) })),
    {
      name: 'light beside the sample',
      unit: 'of the light',
      shape: fitted.map((a) => -(10 ** Math.min(a, 6) - 1) / Math.LN10),
    },
    { name: 'bandwidth', unit: 'nm²', shape: curvature(onUsed(model.wavelength), fitted) },
  ];
}

/** Second derivative by wavelength, halved: what a wider slit adds per nm² of its variance. */
function curvature(wavelength: Float64Array, curve: Float64Array): Float64Array {
  return curve.map((_, i) => {
    const j = Math.min(Math.max(i, 1), curve.length - 2);
    const left = wavelength[j]! - wavelength[j - 1]!;
    const right = wavelength[j + 1]! - wavelength[j]!;
    return ((curve[j + 1]! - curve[j]!) / right - (curve[j]! - curve[j - 1]!) / left) / (left + right);
  });
}

/** Scores of the given shapes, and of path and wavelength, which the fit itself carries. */
export function scoreFaults(
  prepared: Prepared,
  absorbance: Float64Array,
  solution: Solution,
  priors: CuvettePriors,
  shapes: readonly FaultShape[],
): FaultScore[] {
  const { total } = fittedCurve(prepared, solution, priors.pathLength);
  const residual = whiten(
    prepared.whitening,
    absorbance.map((value, l) => value - total[l]!),
  );
  const jacobian = whitenedJacobian(prepared, solution, priors.pathLength);
  const scores = shapes.map(({ name, unit, shape }): FaultScore => {
    const m = whiten(prepared.whitening, shape);
    const pull = jacobian.map((row) => dot(row, m));
    const gain = [0, 1].map((c) => pull.reduce((sum, value, p) => sum + solution.covariance[c * 4 + p]! * value, 0));
    let information = dot(m, m);
    for (let p = 0; p < 4; p++)
      for (let q = 0; q < 4; q++) information -= pull[p]! * solution.covariance[p * 4 + q]! * pull[q]!;
    const slope = dot(m, residual);
    const amplitude = slope / information;
    return {
      name,
      unit,
      amplitude,
      uncertainty: 1 / Math.sqrt(information),
      score: slope / Math.sqrt(information),
      shareEffect: shareEffect(solution, amplitude * gain[0]!, amplitude * gain[1]!),
    };
  });
  return [
    ...scores,
    priorScore('path', 'relative', solution, 2, priors.pathUncertainty),
    priorScore('wavelength', 'nm', solution, 3, priors.wavelengthUncertainty),
  ];
}

const shareEffect = (solution: Solution, lower: number, higher: number): number => {
  const total = solution.lower + solution.higher;
  return (higher * solution.lower - lower * solution.higher) / total ** 2;
};

function priorScore(name: string, unit: string, solution: Solution, index: 2 | 3, prior: number): FaultScore {
  const estimate = index === 2 ? solution.pathShift : solution.wavelengthShift;
  const learnt = prior * prior - solution.covariance[index * 5]!;
  // A path that only scales a Beer-Lambert spectrum teaches nothing: posterior equals prior, and there is no score.
  if (!(learnt > 1e-6 * prior * prior))
    return { name, unit, amplitude: 0, uncertainty: Infinity, score: 0, shareEffect: 0 };
  const amplitude = (estimate * prior * prior) / learnt;
  const ratio = (c: 0 | 1): number => solution.covariance[c * 4 + index]! / solution.covariance[index * 5]!;
  return {
    name,
    unit,
    amplitude,
    uncertainty: (prior * prior) / Math.sqrt(learnt),
    score: estimate / Math.sqrt(learnt),
    // The fit has followed only part of the effect; the rest is still in the concentrations.
    shareEffect: shareEffect(solution, -ratio(0) * (amplitude - estimate), -ratio(1) * (amplitude - estimate)),
  };
}

/** Rows ∂A/∂(lower, higher, s, δ), whitened. */
export function whitenedJacobian(prepared: Prepared, solution: Solution, pathLength: number): Float64Array[] {
  const { model, used, amountCount, whitening } = prepared;
  const amounts = prepared.amounts(solution.lower, solution.higher, newAmounts(amountCount));
  const { total, shifted } = fittedCurve(prepared, solution, pathLength);
  const scale = pathLength * Math.exp(solution.pathShift);
  const by = (derivative: Float64Array): Float64Array => {
    const row = new Float64Array(used.length);
    model.spectra.forEach((spectrum, k) => {
      const slope = shiftedByOneNanometre(model.wavelength, spectrum);
      for (let l = 0; l < row.length; l++)
        row[l]! += scale * derivative[k]! * (spectrum[used[l]!]! + solution.wavelengthShift * slope[used[l]!]!);
    });
    return row;
  };
  return [by(amounts.byLower), by(amounts.byHigher), total, shifted].map((row) => whiten(whitening, row));
}
