// What        Composition, path error and wavelength shift of one reduced spectrum.
// Equation    minimise |z − ℓ e^s Σ_k y_k(c)(R_k + δ R′_k)|² + (s/u_s)² + (δ/u_δ)² [+ (c − c₀)ᵀP(c − c₀)] over c_lower, c_higher, s, δ.
// Why so      Gauss-Newton with exact derivatives and Marquardt damping in 2k dimensions; with a complex the problem has several minima,
//             so it starts from the best nodes of a coarse grid over share and total, not from the Beer-Lambert solution.
// Valid for   any preparation. The prior on c serves standards, whose label is known with an uncertainty.
// Units       c mol/L in the cuvette, ℓ cm, s 1 (relative), δ nm.
// Source      Marquardt, J. Soc. Ind. Appl. Math. 1963, 11, 431; multi-start and reduction ours.
import { newAmounts, type AbsorbingAmounts } from '../electrolyte/forwardModel.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { factorInPlace, inverseOf, solveInPlace } from '../numerics/smallCholesky.ts';
import type { Prepared } from './prepare.ts';

/** What is known of the cuvette besides its spectrum. */
export interface CuvettePriors {
  /** cm */
  readonly pathLength: number;
  /** relative standard uncertainty of the path */
  readonly pathUncertainty: number;
  /** standard uncertainty of the wavelength axis, nm */
  readonly wavelengthUncertainty: number;
  /** a label and its precision matrix (row-major 2 × 2, L²/mol²); absent for a sample */
  readonly label?: { readonly lower: number; readonly higher: number; readonly precision: Float64Array };
}

export interface Reduced {
  /** QᵀΣ^(−½)A */
  readonly z: Float64Array;
  /** |Σ^(−½)A|² − |z|²: what no composition explains */
  readonly residual: number;
}

export interface Solution {
  /** totals, mol/L in the cuvette */
  readonly lower: number;
  readonly higher: number;
  /** relative path error s */
  readonly pathShift: number;
  /** nm */
  readonly wavelengthShift: number;
  /** row-major 4 × 4 covariance of (lower, higher, s, δ) from noise, modes and priors */
  readonly covariance: Float64Array;
  /** row-major 4 × 4: what the spectrum alone says, JᵀΣ⁻¹J without any prior */
  readonly information: Float64Array;
  /** χ² of the spectrum: whitened residual, priors not counted */
  readonly chiSquare: number;
  /** χ² and priors */
  readonly objective: number;
  readonly converged: boolean;
}

/** Reduces absorbances on the used wavelengths of a preparation. */
export function reduce(prepared: Prepared, absorbance: Float64Array): Reduced {
  const { whitening } = prepared;
  const z = Float64Array.from(prepared.projector, (row) => dot(row, absorbance));
  let norm = dot(absorbance, absorbance);
  whitening.directions.forEach((direction, j) => {
    const keep = 1 - whitening.shrink[j]!;
    norm -= (1 - keep * keep) * dot(direction, absorbance) ** 2;
  });
  return { z, residual: Math.max(0, norm / (whitening.noise * whitening.noise) - dot(z, z)) };
}

export const TIGHTEST = 1e-9;
const MOST_STEPS = 60;
export const SHARES = [0.02, 0.15, 0.35, 0.5, 0.65, 0.85, 0.98];
export const TOTALS = [0.003, 0.01, 0.03, 0.08, 0.2, 0.45, 0.8, 1.2, 1.7, 2.4];

class Problem {
  private readonly amounts: AbsorbingAmounts;
  private readonly model: Float64Array;
  private readonly jacobian: Float64Array[];
  readonly hessian = new Float64Array(16);
  readonly gradient = new Float64Array(4);
  readonly information = new Float64Array(16);
  dataTerm = 0;
  private readonly prepared: Prepared;
  private readonly z: Float64Array;
  private readonly priors: CuvettePriors;
  private readonly pathPrecision: number;
  private readonly shiftPrecision: number;

  constructor(prepared: Prepared, z: Float64Array, priors: CuvettePriors) {
    this.prepared = prepared;
    this.z = z;
    this.priors = priors;
    this.amounts = newAmounts(prepared.amountCount);
    this.model = new Float64Array(prepared.dimension);
    this.jacobian = Array.from({ length: 4 }, () => new Float64Array(prepared.dimension));
    this.pathPrecision = 1 / Math.max(priors.pathUncertainty, TIGHTEST) ** 2;
    this.shiftPrecision = 1 / Math.max(priors.wavelengthUncertainty, TIGHTEST) ** 2;
  }

  /** Objective at θ = (lower, higher, s, δ); fills `dataTerm`. */
  value(theta: Float64Array): number {
    const { prepared, amounts, model } = this;
    prepared.amounts(theta[0]!, theta[1]!, amounts);
    const scale = this.priors.pathLength * Math.exp(theta[2]!);
    const k = prepared.amountCount;
    model.fill(0);
    for (let j = 0; j < k; j++) {
      const image = prepared.image[j]!;
      const shifted = prepared.image[k + j]!;
      const amount = scale * amounts.amount[j]!;
      for (let i = 0; i < model.length; i++) model[i]! += amount * (image[i]! + theta[3]! * shifted[i]!);
    }
    let sum = 0;
    for (let i = 0; i < model.length; i++) sum += (this.z[i]! - model[i]!) ** 2;
    this.dataTerm = sum;
    sum += this.pathPrecision * theta[2]! ** 2 + this.shiftPrecision * theta[3]! ** 2;
    const { label } = this.priors;
    if (label) {
      const a = theta[0]! - label.lower;
      const b = theta[1]! - label.higher;
      sum += label.precision[0]! * a * a + 2 * label.precision[1]! * a * b + label.precision[3]! * b * b;
    }
    return sum;
  }

  /** Gauss-Newton matrix and right-hand side at the point `value` was last asked for. */
  linearise(theta: Float64Array): void {
    const { prepared, amounts, model, jacobian, hessian, gradient } = this;
    const scale = this.priors.pathLength * Math.exp(theta[2]!);
    const k = prepared.amountCount;
    const [byLower, byHigher, byPath, byShift] = jacobian as [Float64Array, Float64Array, Float64Array, Float64Array];
    byLower.fill(0);
    byHigher.fill(0);
    byShift.fill(0);
    byPath.set(model);
    for (let j = 0; j < k; j++) {
      const image = prepared.image[j]!;
      const shifted = prepared.image[k + j]!;
      const a = scale * amounts.byLower[j]!;
      const b = scale * amounts.byHigher[j]!;
      const c = scale * amounts.amount[j]!;
      for (let i = 0; i < model.length; i++) {
        const unit = image[i]! + theta[3]! * shifted[i]!;
        byLower[i]! += a * unit;
        byHigher[i]! += b * unit;
        byShift[i]! += c * shifted[i]!;
      }
    }
    for (let p = 0; p < 4; p++) {
      for (let q = 0; q <= p; q++) {
        const sum = dot(jacobian[p]!, jacobian[q]!);
        hessian[p * 4 + q] = sum;
        hessian[q * 4 + p] = sum;
      }
      let sum = 0;
      for (let i = 0; i < model.length; i++) sum += jacobian[p]![i]! * (this.z[i]! - model[i]!);
      gradient[p] = sum;
    }
    this.information.set(hessian);
    hessian[10]! += this.pathPrecision;
    gradient[2]! -= this.pathPrecision * theta[2]!;
    hessian[15]! += this.shiftPrecision;
    gradient[3]! -= this.shiftPrecision * theta[3]!;
    const { label } = this.priors;
    if (!label) return;
    const a = theta[0]! - label.lower;
    const b = theta[1]! - label.higher;
    const [paa, pab, , pbb] = label.precision as unknown as [number, number, number, number];
    hessian[0]! += paa;
    hessian[1]! += pab;
    hessian[4]! += pab;
    hessian[5]! += pbb;
    gradient[0]! -= paa * a + pab * b;
    gradient[1]! -= pab * a + pbb * b;
  }
}

/** @returns the best solution over all starts; `converged` is false where the last step still moved the result */
export function solve(prepared: Prepared, reduced: Reduced, priors: CuvettePriors): Solution {
  const problem = new Problem(prepared, reduced.z, priors);
  let best: Descent | null = null;
  for (const start of startsFor(prepared, problem, priors)) {
    const descent = descend(problem, start);
    if (!best || descent.objective < best.objective - 1e-9 * Math.abs(best.objective)) best = descent;
  }
  const { theta, converged } = best!;
  const objective = problem.value(theta);
  problem.linearise(theta);
  const covariance = inverseOf(problem.hessian, 4) ?? new Float64Array(16).fill(NaN);
  return {
    lower: theta[0]!,
    higher: theta[1]!,
    pathShift: theta[2]!,
    wavelengthShift: theta[3]!,
    covariance,
    information: Float64Array.from(problem.information),
    chiSquare: problem.dataTerm + reduced.residual,
    objective: objective + reduced.residual,
    converged,
  };
}

/** A label is its own start; without complexes one start is enough; otherwise the two best nodes of the grid. */
function startsFor(prepared: Prepared, problem: Problem, priors: CuvettePriors): Float64Array[] {
  if (priors.label) return [Float64Array.of(priors.label.lower, priors.label.higher, 0, 0)];
  const nodes: { theta: Float64Array; value: number }[] = [];
  for (const total of TOTALS)
    for (const share of SHARES) {
      const theta = Float64Array.of(total * (1 - share), total * share, 0, 0);
      nodes.push({ theta, value: problem.value(theta) });
    }
  nodes.sort((a, b) => a.value - b.value);
  return nodes.slice(0, prepared.amountCount > 2 ? 3 : 1).map((node) => node.theta);
}

interface Descent {
  theta: Float64Array;
  objective: number;
  converged: boolean;
}

function descend(problem: Problem, start: Float64Array): Descent {
  let theta = Float64Array.from(start);
  let objective = problem.value(theta);
  let damping = 1e-6;
  let converged = false;
  const factor = new Float64Array(16);
  const step = new Float64Array(4);
  problem.linearise(theta);
  for (let count = 0; count < MOST_STEPS && !converged; count++) {
    factor.set(problem.hessian);
    for (let p = 0; p < 4; p++) factor[p * 5]! *= 1 + damping;
    step.set(problem.gradient);
    if (!factorInPlace(factor, 4)) {
      damping = Math.max(damping * 10, 1e-6);
      continue;
    }
    solveInPlace(factor, 4, step);
    const next = theta.map((value, p) => value + step[p]!);
    const value = problem.value(next);
    if (value <= objective) {
      converged = objective - value <= 1e-12 * (1 + objective);
      theta = next;
      objective = value;
      damping = Math.max(damping / 5, 1e-12);
      problem.linearise(theta);
    } else {
      // Rounding can keep the objective from falling at the minimum itself.
      if (value - objective <= 1e-12 * (1 + objective)) converged = true;
      damping = Math.max(damping * 8, 1e-6);
      if (damping > 1e12) break;
    }
  }
  return { theta, objective, converged };
}
