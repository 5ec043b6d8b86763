// What        `solve` for many spectra: the same minimum, without a single allocation per spectrum.
// Equation    with w = BᵀΣ^(−½)A, w′ = B′ᵀΣ^(−½)A and the Gram matrices G = BᵀB, K = B′ᵀB, G″ = B′ᵀB′ (B spectra, B′ shifted by 1 nm,
//             both whitened) the objective of `solve` is, up to |Σ^(−½)A|²,
//             −2c yᵀ(w + δw′) + c² yᵀ(G + δ(K + Kᵀ) + δ²G″)y + (s/u_s)² + (δ/u_δ)²,  c = ℓe^s.
// Why so      2k dot products per spectrum and k × k matrices ever after; gradient and Gauss-Newton matrix come from the same few sums.
//             Starts from the linear solution with free complexes, one 2 × k product; where the minimum found is much worse than that
//             linear solution, a coarse grid over share and total is searched as well, as in `solve`.
// Valid for   the models of `solve`.
// Units       mol/L in the cuvette, cm, nm; share 1.
// Source      normal equations of Gauss-Newton; Marquardt 1963 for the damping; elimination ours.
import { TankhueError } from '../errors.ts';
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { factorPacked, solvePacked } from '../numerics/packedCholesky.ts';
import { inverseOf } from '../numerics/smallCholesky.ts';
import { kernelAmounts } from './kernelAmounts.ts';
import type { Prepared } from './prepare.ts';
import { SHARES, TIGHTEST, TOTALS, type CuvettePriors } from './solve.ts';

/** A point of the descent in one flat array: θ = (lower, higher, s, δ), −½ gradient (4), lower triangle of the Gauss-Newton matrix (10), objective. */
const GRADIENT = 4;
const MATRIX = 8;
const OBJECTIVE = 18;
const POINT_SIZE = 19;

const MOST_STEPS = 60;
/** Decrease still to be had after the last step, by the rate at which steps shrink: 3e-7 standard uncertainties. */
export const FINISHED = 1e-13;
/** Misfit above that of the linear solution with free complexes from which other minima are looked for. */
export const SUSPICIOUS = 12;
const STARTS = 3;
/** Relative error of an objective: a difference of sums of squares a million times as large. */
export const ROUNDING = 1e-14;

/** Products of the whitened spectra B and their shifts B′, row-major k × k. */
export interface KernelMatrices {
  /** BᵀB */
  readonly gram: Float64Array;
  /** BᵀB′ */
  readonly cross: Float64Array;
  /** BᵀB′ + B′ᵀB */
  readonly both: Float64Array;
  /** B′ᵀB′ */
  readonly gramShifted: Float64Array;
  /** (BᵀB)⁻¹ */
  readonly inverse: Float64Array;
}

export interface Kernel {
  readonly matrices: KernelMatrices;
  /** rows w of the map spectrum → projections, each as long as `prepared.used` */
  readonly projector: readonly Float64Array[];
  /** lower, higher (mol/L in the cuvette), s, δ of the last solution; NaN where there is none */
  readonly theta: Float64Array;
  /** @param w projections of one spectrum @returns χ² less the spectrum's own |Σ^(−½)A|² */
  solve(w: Float64Array): number;
  /** of the calibration at the last solution, as `calibrationLeverage` */
  leverage(): number;
  /** of a quantity with these derivatives by the two concentrations, at the last solution: as `concentrationCovariance` */
  variance(byLower: number, byHigher: number, leverage: number): number;
}

export function makeKernel(prepared: Prepared, priors: CuvettePriors): Kernel {
  const k = prepared.amountCount;
  const dimension = 2 * k;
  const { pathLength } = priors;
  const { pathPrecision, shiftPrecision } = precisionsOf(priors);
  const { image, projector: basis, model } = prepared;
  const matrices = kernelMatrices(prepared);
  const { gram, both, cross, gramShifted, inverse } = matrices;
  const extra = kernelAmounts(model);
  const extras = k - 2;
  const design = model.designInverse;

  const theta = new Float64Array(4).fill(NaN);
  const y = new Float64Array(k);
  const w = new Float64Array(dimension);
  const tilted = new Float64Array(k * k);
  const hy = new Float64Array(k);
  const ty = new Float64Array(k);
  let current = new Float64Array(POINT_SIZE);
  let trial = new Float64Array(POINT_SIZE);
  const best = new Float64Array(POINT_SIZE);
  const factor = new Float64Array(10);
  const step = new Float64Array(4);
  const nodes = nodesOf(prepared, gram);
  const nodeValue = new Float64Array(nodes.count);

  /** Objective, gradient and matrix at θ = out[0…3], in one go. */
  const evaluate = (out: Float64Array): void => {
    const a = out[0]!;
    const b = out[1]!;
    const s = out[2]!;
    const d = out[3]!;
    extra.evaluate(a, b);
    const { amount, byLower, byHigher } = extra;
    y[0] = a;
    y[1] = b;
    for (let j = 0; j < extras; j++) y[2 + j] = amount[j]!;
    const c = s === 0 ? pathLength : pathLength * Math.exp(s);
    let fitted = 0;
    let norm = 0;
    let byShift = 0;
    let tilt = 0;
    let curve = 0;
    for (let i = 0; i < k; i++) {
      let h = 0;
      let t = 0;
      let g = 0;
      for (let j = 0; j < k; j++) {
        const n = i * k + j;
        const yj = y[j]!;
        const second = d * gramShifted[n]!;
        const value = gram[n]! + d * (both[n]! + second);
        tilted[n] = value;
        h += value * yj;
        t += (cross[n]! + second) * yj;
        g += gramShifted[n]! * yj;
      }
      hy[i] = h;
      ty[i] = t;
      const yi = y[i]!;
      fitted += yi * (w[i]! + d * w[k + i]!);
      byShift += yi * w[k + i]!;
      norm += yi * h;
      tilt += yi * t;
      curve += yi * g;
    }
    let ga = w[0]! + d * w[k]! - c * hy[0]!;
    let gb = w[1]! + d * w[k + 1]! - c * hy[1]!;
    let aa = tilted[0]!;
    let ab = tilted[1]!;
    let bb = tilted[k + 1]!;
    let as = hy[0]!;
    let bs = hy[1]!;
    let ad = ty[0]!;
    let bd = ty[1]!;
    for (let j = 0; j < extras; j++) {
      const i = 2 + j;
      const p = byLower[j]!;
      const q = byHigher[j]!;
      const r = w[i]! + d * w[k + i]! - c * hy[i]!;
      ga += p * r;
      gb += q * r;
      as += p * hy[i]!;
      bs += q * hy[i]!;
      ad += p * ty[i]!;
      bd += q * ty[i]!;
      let pa = 2 * tilted[i]!;
      let qb = 2 * tilted[k + i]!;
      let cross = p * tilted[k + i]! + q * tilted[i]!;
      for (let m = 0; m < extras; m++) {
        const value = tilted[i * k + 2 + m]!;
        pa += value * byLower[m]!;
        qb += value * byHigher[m]!;
        cross += p * value * byHigher[m]!;
      }
      aa += p * pa;
      bb += q * qb;
      ab += cross;
    }
    const cc = c * c;
    out[GRADIENT] = c * ga;
    out[GRADIENT + 1] = c * gb;
    out[GRADIENT + 2] = c * (fitted - c * norm) - pathPrecision * s;
    out[GRADIENT + 3] = c * (byShift - c * tilt) - shiftPrecision * d;
    out[MATRIX] = cc * aa;
    out[MATRIX + 1] = cc * ab;
    out[MATRIX + 2] = cc * bb;
    out[MATRIX + 3] = cc * as;
    out[MATRIX + 4] = cc * bs;
    out[MATRIX + 5] = cc * norm + pathPrecision;
    out[MATRIX + 6] = cc * ad;
    out[MATRIX + 7] = cc * bd;
    out[MATRIX + 8] = cc * tilt;
    out[MATRIX + 9] = cc * curve + shiftPrecision;
    out[OBJECTIVE] = c * (c * norm - 2 * fitted) + pathPrecision * s * s + shiftPrecision * d * d;
  };

  /** From `current` downhill; `current` is the minimum afterwards. @returns false where it was not reached */
  const descend = (): boolean => {
    let damping = 0;
    let before = 0;
    evaluate(current);
    for (let count = 0; count < MOST_STEPS; count++) {
      if (!factorPacked(current, MATRIX, 1 + damping, factor)) {
        if (!(current[OBJECTIVE]! < Infinity)) return false;
        damping = Math.max(10 * damping, 1e-6);
        continue;
      }
      let promised = 0;
      for (let p = 0; p < 4; p++) step[p] = current[GRADIENT + p]!;
      solvePacked(factor, step);
      for (let p = 0; p < 4; p++) {
        promised += step[p]! * current[GRADIENT + p]!;
        trial[p] = current[p]! + step[p]!;
      }
      // Nothing promised, nothing before: 0 · (0/0) is not below, so the question is asked the other way round.
      if (!(promised * Math.min(1, promised / before) >= FINISHED)) {
        for (let p = 0; p < 4; p++) current[p] = trial[p]!;
        return true;
      }
      evaluate(trial);
      if (trial[OBJECTIVE]! <= current[OBJECTIVE]! + ROUNDING * Math.abs(current[OBJECTIVE]!)) {
        const swap = current;
        current = trial;
        trial = swap;
        damping = damping < 1e-6 ? 0 : damping / 10;
        before = promised;
      } else {
        damping = Math.max(8 * damping, 1e-4);
        if (!(damping < 1e12)) return false;
      }
    }
    return false;
  };

  const startAt = (lower: number, higher: number): void => {
    current[0] = lower;
    current[1] = higher;
    current[2] = 0;
    current[3] = 0;
  };

  /** The best of the coarse grid's best nodes, and of `best`, ends in `best`. */
  const searchGrid = (): void => {
    for (let n = 0; n < nodes.count; n++) {
      let fitted = 0;
      for (let j = 0; j < k; j++) fitted += nodes.amount[n * k + j]! * w[j]!;
      nodeValue[n] = pathLength * (pathLength * nodes.norm[n]! - 2 * fitted);
    }
    for (let start = 0; start < STARTS; start++) {
      let lowest = 0;
      for (let n = 1; n < nodes.count; n++) if (nodeValue[n]! < nodeValue[lowest]!) lowest = n;
      nodeValue[lowest] = Infinity;
      startAt(nodes.amount[lowest * k]!, nodes.amount[lowest * k + 1]!);
      descend();
      if (!(current[OBJECTIVE]! >= best[OBJECTIVE]! - 1e-9 * Math.abs(best[OBJECTIVE]!))) best.set(current);
    }
  };

  const solve = (projections: Float64Array): number => {
    for (let i = 0; i < dimension; i++) w[i] = projections[i]!;
    let lower = 0;
    let higher = 0;
    let linear = 0;
    for (let i = 0; i < k; i++) {
      let amount = 0;
      for (let j = 0; j < k; j++) amount += inverse[i * k + j]! * w[j]!;
      if (i === 0) lower = amount / pathLength;
      else if (i === 1) higher = amount / pathLength;
      linear -= amount * w[i]!;
    }
    if (!(Math.abs(linear) < Infinity)) {
      theta.fill(NaN);
      return NaN;
    }
    best[OBJECTIVE] = Infinity;
    if (lower + higher > 0) {
      startAt(lower, higher);
      if (descend()) best.set(current);
    }
    if (!(best[OBJECTIVE]! - linear <= SUSPICIOUS)) searchGrid();
    for (let p = 0; p < 4; p++) theta[p] = best[p]!;
    return best[OBJECTIVE]! - pathPrecision * theta[2]! * theta[2]! - shiftPrecision * theta[3]! * theta[3]!;
  };

  const leverage = (): number => {
    extra.evaluate(theta[0]!, theta[1]!);
    y[0] = theta[0]!;
    y[1] = theta[1]!;
    for (let j = 0; j < extras; j++) y[2 + j] = extra.amount[j]!;
    let sum = 0;
    for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) sum += y[i]! * design[i * k + j]! * y[j]!;
    return pathLength * pathLength * sum;
  };

  const variance = (byLower: number, byHigher: number, leverage: number): number => {
    if (!factorPacked(best, MATRIX, 1, factor)) return NaN;
    step[0] = byLower;
    step[1] = byHigher;
    step[2] = 0;
    step[3] = 0;
    solvePacked(factor, step);
    const whole = byLower * step[0]! + byHigher * step[1]!;
    // H⁻¹IH⁻¹ with I = H − priors: what noise and modes alone make of it, and of the calibration's spectra.
    const spectral = whole - pathPrecision * step[2]! * step[2]! - shiftPrecision * step[3]! * step[3]!;
    return whole + leverage * spectral;
  };

  return { matrices, projector: normalProjector(image, basis), theta, solve, leverage, variance };
}

/** One over the squares of the priors of path and wavelength. */
export const precisionsOf = (priors: CuvettePriors): { pathPrecision: number; shiftPrecision: number } => ({
  pathPrecision: 1 / Math.max(priors.pathUncertainty, TIGHTEST) ** 2,
  shiftPrecision: 1 / Math.max(priors.wavelengthUncertainty, TIGHTEST) ** 2,
});

/** @throws TankhueError `spectra-alike` */
function kernelMatrices({ image, amountCount: k, model }: Prepared): KernelMatrices {
  const products = (rows: readonly Float64Array[], columns: readonly Float64Array[]): Float64Array =>
    Float64Array.from({ length: k * k }, (_, n) => dot(rows[Math.floor(n / k)]!, columns[n % k]!));
  const plain = image.slice(0, k);
  const shifted = image.slice(k);
  const gram = products(plain, plain);
  const cross = products(plain, shifted);
  const inverse = inverseOf(gram, k);
  if (!inverse)
    throw new TankhueError(
      'spectra-alike',
      `expected spectra of ${model.pair} that can be told apart; received some that cannot`,
      'calibration, wavelengths',
      'use more of the calibration’s range',
    );
  return {
    gram,
    cross,
    both: cross.map((value, n) => value + cross[(n % k) * k + Math.floor(n / k)]!),
    gramShifted: products(shifted, shifted),
    inverse,
  };
}

/** Rows b_jᵀΣ^(−½): the projections onto the whitened spectra themselves, from those onto their orthonormal basis. */
const normalProjector = (image: readonly Float64Array[], basis: readonly Float64Array[]): Float64Array[] =>
  image.map((column) => {
    const row = new Float64Array(basis[0]!.length);
    column.forEach((value, i) => {
      for (let l = 0; l < row.length; l++) row[l]! += value * basis[i]![l]!;
    });
    return row;
  });

/** Amounts y of the coarse grid of `solve` and their yᵀGy. */
function nodesOf(
  prepared: Prepared,
  gram: Float64Array,
): { readonly count: number; readonly amount: Float64Array; readonly norm: Float64Array } {
  const k = prepared.amountCount;
  const scratch = newAmounts(k);
  const amounts = TOTALS.flatMap((total) =>
    SHARES.map((share) => prepared.amounts(total * (1 - share), total * share, scratch).amount.slice()),
  );
  const norm = Float64Array.from(amounts, (amount) => {
    let sum = 0;
    for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) sum += amount[i]! * gram[i * k + j]! * amount[j]!;
    return sum;
  });
  return { count: amounts.length, amount: Float64Array.from(amounts.flatMap((amount) => [...amount])), norm };
}
