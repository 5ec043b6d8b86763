// What        How well one cuvette would tell its composition: the information of every wavelength about both concentrations and
//             about the systematic effects that stand in the way, before anything is measured.
// Equation    A = ℓ Σ y_k(c) e_k + Σ_m b_m u_m + noise, b_m ~ N(0, 1): M = Σ_λ J Jᵀ/σ² + diag(0, 0, 1 … 1), covariance = M⁻¹;
//             Σ_λ is kept as a running sum, so that any range of wavelengths costs one small factorisation.
// Why so      the same modes and priors as the assay, so the plan foretells what the assay will report. Stray light enters as a mode
//             of its measured size, (1 − 10^A)/ln 10 per unit: dark wavelengths lose their weight by themselves.
// Valid for   errors small enough to be linear; wavelengths above the ceiling are not used.
// Units       c mol/L in the cuvette, ℓ cm, absorbance.
// Source      Cramér-Rao bound of generalised least squares with priors; JCGM 100.
import { newAmounts } from '../../electrolyte/forwardModel.ts';
import { namedModes, type ModePriors } from '../../estimation/namedModes.ts';
import { shiftedByOneNanometre } from '../../estimation/prepare.ts';
import type { MeasurementModel } from './measurementModel.ts';

/** What is known of the photometer; `verify` measures it. */
export interface PhotometerTraits {
  /** standard deviations: σ² = constant² + shot²·10^A, absorbance per native point */
  readonly noise: { readonly constant: number; readonly shot: number };
  /** native points averaged into one grid point of the calibration */
  readonly pointsAveraged: number;
  /** share of the beam, 0…1 */
  readonly strayLight: number;
  readonly priors: ModePriors;
  /** absorbance above which points are not used */
  readonly ceiling: number;
}

export interface Cuvette {
  /** totals in the cuvette, mol/L */
  readonly lower: number;
  readonly higher: number;
  /** cm */
  readonly pathLength: number;
  /** relative, shared by all fillings, and from filling to filling */
  readonly pathUncertainty: number;
  readonly fillingScatter: number;
}

/** What a disturbance comes from, and whether a fresh filling draws it anew. */
export interface Disturbance {
  readonly source: string;
  readonly isRandom: boolean;
  /** absorbance, one standard deviation */
  readonly shape: Float64Array;
}

export interface CuvetteDesign {
  readonly absorbance: Float64Array;
  readonly usable: readonly boolean[];
  /** ∂A/∂c of the lower and higher species */
  readonly byLower: Float64Array;
  readonly byHigher: Float64Array;
  readonly disturbances: readonly Disturbance[];
  /** variance of one grid point */
  readonly variance: Float64Array;
  /** disturbances first, then lower, then higher */
  readonly dimension: number;
  /** running sums of the lower triangle of JJᵀ/σ², (wavelengths + 1) blocks */
  readonly running: Float64Array;
  /** amounts in the cuvette, as the forward model has them */
  readonly amounts: Float64Array;
}

export function designCuvette(model: MeasurementModel, cuvette: Cuvette, photometer: PhotometerTraits): CuvetteDesign {
  const { wavelength, spectra } = model;
  const { amount, byLower, byHigher } = model.amounts(cuvette.lower, cuvette.higher, newAmounts(spectra.length));
  const combine = (weights: Float64Array): Float64Array => {
    const sum = new Float64Array(wavelength.length);
    spectra.forEach((spectrum, k) => {
      const weight = cuvette.pathLength * weights[k]!;
      for (let i = 0; i < sum.length; i++) sum[i]! += weight * spectrum[i]!;
    });
    return sum;
  };
  const absorbance = combine(amount);
  const columns = { byLower: combine(byLower), byHigher: combine(byHigher) };
  const variance = absorbance.map((A) => {
    const shot = photometer.noise.shot ** 2 * 10 ** Math.min(A, 6);
    return model.noise ** 2 + (photometer.noise.constant ** 2 + shot) / photometer.pointsAveraged;
  });
  const usable = Array.from(absorbance, (A) => A <= photometer.ceiling);
  const disturbances = disturbancesOf(model, cuvette, photometer, absorbance);
  const rows = [...disturbances.map(({ shape }) => shape), columns.byLower, columns.byHigher];
  return {
    absorbance,
    usable,
    ...columns,
    disturbances,
    variance,
    dimension: rows.length,
    running: runningInformation(rows, variance, usable),
    amounts: amount,
  };
}

function disturbancesOf(
  model: MeasurementModel,
  cuvette: Cuvette,
  { priors, strayLight }: PhotometerTraits,
  absorbance: Float64Array,
): Disturbance[] {
  const scaled = (shape: Float64Array, by: number) => shape.map((value) => value * by);
  const brightness = Math.max(1, absorbance.reduce((a, b) => Math.max(a, b), 0) / model.brightest);
  const all: Disturbance[] = [
    ...namedModes(model.wavelength, priors).map(({ name, shape, prior }) => ({
      source: name,
      isRandom: true,
      shape: scaled(shape, prior),
    })),
    { source: 'filling of the cell', isRandom: true, shape: scaled(absorbance, cuvette.fillingScatter) },
    { source: 'path of the cell', isRandom: false, shape: scaled(absorbance, cuvette.pathUncertainty) },
    {
      source: 'wavelength axis',
      isRandom: false,
      shape: scaled(shiftedByOneNanometre(model.wavelength, absorbance), priors.wavelengthShift),
    },
    {
      source: 'stray light',
      isRandom: false,
      shape: absorbance.map((A) => (strayLight * (1 - 10 ** Math.min(A, 6))) / Math.LN10),
    },
    ...model.patterns.map((pattern) => ({
      source: 'pattern of the standards',
      isRandom: false,
      shape: scaled(pattern, brightness),
    })),
  ];
  return all.filter(({ shape }) => shape.some((value) => value !== 0));
}

function runningInformation(
  rows: readonly Float64Array[],
  variance: Float64Array,
  usable: readonly boolean[],
): Float64Array {
  const size = rows.length;
  const block = (size * (size + 1)) / 2;
  const running = new Float64Array((variance.length + 1) * block);
  for (let i = 0; i < variance.length; i++) {
    const before = i * block;
    const after = before + block;
    if (!usable[i]) {
      running.copyWithin(after, before, after);
      continue;
    }
    let at = 0;
    for (let p = 0; p < size; p++) {
      const weighted = rows[p]![i]! / variance[i]!;
      for (let q = 0; q <= p; q++, at++) running[after + at] = running[before + at]! + weighted * rows[q]![i]!;
    }
  }
  return running;
}

/** Part of a concentration's information that must be left after everything else is known; less is rounding. */
const DEPENDENT = 1e-12;

/** Variances of the share of the higher species and of the relative total that a range of wavelengths leaves. */
export class RangeSolver {
  private readonly factor: Float64Array;
  private readonly design: CuvetteDesign;
  private readonly shareGradient: readonly [number, number];
  private readonly totalGradient: readonly [number, number];

  constructor(design: CuvetteDesign, lower: number, higher: number) {
    const total = lower + higher;
    this.design = design;
    this.factor = new Float64Array((design.dimension * (design.dimension + 1)) / 2);
    this.shareGradient = [-higher / total ** 2, lower / total ** 2];
    this.totalGradient = [1 / total, 1 / total];
  }

  /** @param from first and @param to last wavelength index + 1 @returns null where the range cannot tell the two species apart */
  solve(from: number, to: number): { share: number; total: number } | null {
    if (!this.factorise(from, to)) return null;
    return { share: this.varianceOf(this.shareGradient), total: this.varianceOf(this.totalGradient) };
  }

  /** The concentrations stand last, so their variance needs only the last corner of the factor. */
  private varianceOf([gLower, gHigher]: readonly [number, number]): number {
    const size = this.design.dimension;
    const row = ((size - 1) * size) / 2;
    const cornerLower = this.factor[row - 1]!;
    const below = this.factor[row + size - 2]!;
    const cornerHigher = this.factor[row + size - 1]!;
    const first = gLower / cornerLower;
    const second = (gHigher - below * first) / cornerHigher;
    return first * first + second * second;
  }

  private factorise(from: number, to: number): boolean {
    const { dimension: size, running } = this.design;
    const { factor } = this;
    const block = factor.length;
    let row = 0;
    for (let p = 0; p < size; p++) {
      let other = 0;
      for (let q = 0; q <= p; q++) {
        let sum = running[to * block + row + q]! - running[from * block + row + q]!;
        if (p === q && p < size - 2) sum += 1;
        const whole = sum;
        for (let k = 0; k < q; k++) sum -= factor[row + k]! * factor[other + k]!;
        if (p !== q) factor[row + q] = sum / factor[other + q]!;
        else if (sum > DEPENDENT * whole) factor[row + q] = Math.sqrt(sum);
        else return false;
        other += q + 1;
      }
      row += p + 1;
    }
    return true;
  }
}
