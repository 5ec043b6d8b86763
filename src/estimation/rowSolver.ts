// What        Composition of one spectrum after another from their means on a calibration's grid.
// Equation    means → projections w and |Σ^(−½)A|² → `kernel.ts`.
// Why so      What depends on the mask of wavelengths and the cuvette is done once; a spectrum then costs its dot products.
// Valid for   one mask and one cuvette.
// Units       absorbance in; mol/L in the cuvette, share 1 out.
// Source      ours.
import type { Pair } from '../electrolyte/species.ts';
import { assumedPathUncertainty } from './cuvette.ts';
import { fastRows, type FastRows } from './fastRows.ts';
import { makeKernel, precisionsOf } from './kernel.ts';
import { closedTerms } from './kernelAmounts.ts';
import type { AxisMap } from './kernelAxis.ts';
import { DEFAULT_MODE_PRIORS, namedModes, type ModePriors } from './namedModes.ts';
import type { PairModel } from './pairModel.ts';
import { prepare, type Whitening } from './prepare.ts';

/** What of a calibration's pair is needed. */
export interface PairOnGrid {
  readonly pair: Pair;
  readonly model: PairModel;
  readonly betweenGroup: { readonly share: number; readonly total: number };
}

export interface RowCuvette {
  /** cm */
  readonly pathLength: number;
  /** relative; common practice for cells of that length when absent */
  readonly pathUncertainty?: number;
  readonly priors?: ModePriors;
}

/** Every question is about the spectrum that `solve` was last given. */
export interface RowSolver {
  readonly degreesOfFreedom: number;
  /** lower, higher (mol/L in the cuvette), relative path error, wavelength shift (nm) */
  readonly theta: Float64Array;
  /** @param means absorbances on the wavelengths in use, NaN nowhere */
  solve(means: Float64Array): void;
  chiSquare(): number;
  leverage(): number;
  /**
   * standard uncertainty of the share of either species, calibration and between-group variance included
   * @param brightness 1, or how many times darker than the darkest standard the spectrum is
   */
  shareUncertainty(leverage: number, brightness?: number): number;
  /** the same for the total, mol/L in the cuvette */
  totalUncertainty(leverage: number): number;
  /**
   * machine code for the plain rows of a matrix; null where there can be none
   * @param points of the caller's axis
   */
  fast(map: AxisMap, points: number): FastRows | null;
}

/**
 * @param usable one flag per wavelength of the pair's model
 * @throws TankhueError `too-few-wavelengths`
 */
export function rowSolver(record: PairOnGrid, usable: ArrayLike<unknown>, cuvette: RowCuvette): RowSolver {
  const { pathLength, priors = DEFAULT_MODE_PRIORS } = cuvette;
  const { model, betweenGroup } = record;
  const prepared = prepare(model, namedModes(model.wavelength, priors), usable);
  const kernelPriors = {
    pathLength,
    pathUncertainty: cuvette.pathUncertainty ?? assumedPathUncertainty(pathLength),
    wavelengthUncertainty: priors.wavelengthShift,
  };
  const kernel = makeKernel(prepared, kernelPriors);
  const { theta } = kernel;
  const { w, project } = projection(kernel.projector);
  let last: Float64Array = new Float64Array(prepared.used.length);
  let misfit = NaN;
  return {
    degreesOfFreedom: prepared.used.length - 2,
    theta,
    solve: (means) => {
      last = means;
      project(means);
      misfit = kernel.solve(w);
    },
    chiSquare: () => Math.max(0, whitenedNorm(prepared.whitening, last) + misfit),
    leverage: kernel.leverage,
    shareUncertainty: (leverage, brightness = 1) => {
      const total = theta[0]! + theta[1]!;
      const byLower = -theta[1]! / (total * total);
      const byHigher = theta[0]! / (total * total);
      const within = brightness * brightness * kernel.variance(byLower, byHigher, leverage);
      return Math.sqrt(within + betweenGroup.share * betweenGroup.share);
    },
    totalUncertainty: (leverage) => {
      const between = betweenGroup.total * (theta[0]! + theta[1]!);
      return Math.sqrt(kernel.variance(1, 1, leverage) + between * between);
    },
    fast: (map, points) => {
      const terms = closedTerms(model);
      if (!terms) return null;
      const { matrices, projector } = kernel;
      const { whitening } = prepared;
      const { designInverse } = model;
      return fastRows({
        map,
        points,
        projector,
        matrices,
        terms,
        designInverse,
        whitening,
        pathLength,
        ...precisionsOf(kernelPriors),
        betweenGroup,
      });
    },
  };
}

/** Dot products with all rows at once. */
function projection(rows: readonly Float64Array[]): { readonly w: Float64Array; project(means: Float64Array): void } {
  // Four sums at a time keep a processor busy; rows of zeros fill up.
  const dimension = Math.ceil(rows.length / 4) * 4;
  const count = rows[0]!.length;
  const w = new Float64Array(dimension);
  const flat = new Float64Array(count * dimension);
  rows.forEach((row, j) => row.forEach((value, l) => (flat[l * dimension + j] = value)));
  const project = (means: Float64Array): void => {
    for (let j = 0; j < dimension; j += 4) {
      let a = 0;
      let b = 0;
      let c = 0;
      let d = 0;
      for (let l = 0, at = j; l < count; l++, at += dimension) {
        const value = means[l]!;
        a += flat[at]! * value;
        b += flat[at + 1]! * value;
        c += flat[at + 2]! * value;
        d += flat[at + 3]! * value;
      }
      w[j] = a;
      w[j + 1] = b;
      w[j + 2] = c;
      w[j + 3] = d;
    }
  };
  return { w, project };
}

/** |Σ^(−½)x|² in factored form: nothing is written. */
function whitenedNorm({ noise, directions, shrink }: Whitening, x: Float64Array): number {
  let norm = 0;
  for (let l = 0; l < x.length; l++) norm += x[l]! * x[l]!;
  for (let j = 0; j < directions.length; j++) {
    const direction = directions[j]!;
    let along = 0;
    for (let l = 0; l < x.length; l++) along += direction[l]! * x[l]!;
    const keep = 1 - shrink[j]!;
    norm -= (1 - keep * keep) * along * along;
  }
  return norm / (noise * noise);
}
