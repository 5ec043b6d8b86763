// What        State of charge, total and χ² of many spectra on one axis.
// Equation    rows of the caller's axis → means on the calibration's grid → projections w and |Σ^(−½)A|² → `kernel.ts`.
// Why so      Everything that does not depend on the spectrum is done once. Averaging first costs one pass over the points and makes the
//             projections as short as the grid; the residual norm is taken only when χ² is asked for.
// Valid for   spectra without masks: points above the range of the photometer count like any others, which χ² shows. A row with a NaN
//             inside the calibration's range gives NaN.
// Units       absorbance in; mol/L of the tank, state of charge 1 out.
// Source      ours.
import { TankhueError } from '../errors.ts';
import type { Pair } from '../electrolyte/species.ts';
import { assumedPathUncertainty } from './cuvette.ts';
import { makeKernel } from './kernel.ts';
import { axisMap, type AxisMap } from './kernelAxis.ts';
import { DEFAULT_MODE_PRIORS, namedModes, type ModePriors } from './namedModes.ts';
import type { PairModel } from './pairModel.ts';
import { prepare as prepareModel, type Prepared, type Whitening } from './prepare.ts';

/** What of a calibration is needed. */
export interface PairsOnGrid {
  readonly grid: { readonly step: number };
  readonly pairs: readonly {
    readonly pair: Pair;
    readonly model: PairModel;
    readonly betweenGroup: { readonly share: number };
  }[];
}

export interface ManyOptions {
  readonly pair: Pair;
  /** cm */
  readonly pathLength: number;
  /** relative; common practice for cells of that length when absent */
  readonly pathUncertainty?: number;
  /** ≥ 1; 1 when absent */
  readonly dilution?: number;
  readonly priors?: ModePriors;
}

/** One number a spectrum. An array that is left out is not computed. */
export interface ManyResults {
  /** share of V2, V4, V5 for V2/V3, V3/V4, V4/V5; not clipped */
  stateOfCharge?: Float64Array;
  /** standard uncertainty of the state of charge */
  uncertainty?: Float64Array;
  /** mol/L of the tank */
  totalVanadium?: Float64Array;
  /** on `degreesOfFreedom` */
  chiSquare?: Float64Array;
}

export interface PreparedMany {
  /** points of the calibration's grid in use, less the two concentrations */
  readonly degreesOfFreedom: number;
  /**
   * @param absorbances row-major, spectra × points of the axis
   * @param out arrays to fill; all are made where it is absent
   * @throws TankhueError `length-differs`
   */
  solveMany(absorbances: Float64Array): Required<ManyResults>;
  solveMany<Out extends ManyResults>(absorbances: Float64Array, out: Out): Out;
}

/**
 * @param wavelengths nm, ascending: the axis of every spectrum to come
 * @throws TankhueError `not-calibrated`, `out-of-range`, `too-few-wavelengths`, `axis-turns`
 */
export function prepare(calibration: PairsOnGrid, wavelengths: Float64Array, options: ManyOptions): PreparedMany {
  const { pathLength, dilution = 1, priors = DEFAULT_MODE_PRIORS } = options;
  const record = calibration.pairs.find((candidate) => candidate.pair === options.pair);
  if (!record)
    throw new TankhueError(
      'not-calibrated',
      `expected a pair of the calibration (${calibration.pairs.map((one) => one.pair).join(', ')}); received ${options.pair}`,
      'pair',
      'use a calibration that holds it',
    );
  requireInRange('pathLength', pathLength, 0, 'cm');
  requireInRange('dilution', dilution, 1 - 1e-12, '');
  requireAscending(wavelengths);
  const { model } = record;
  const map = axisMap(wavelengths, model.wavelength, calibration.grid.step);
  const prepared = prepareModel(model, namedModes(model.wavelength, priors), map.reached);
  const kernel = makeKernel(prepared, {
    pathLength,
    pathUncertainty: options.pathUncertainty ?? assumedPathUncertainty(pathLength),
    wavelengthUncertainty: priors.wavelengthShift,
  });
  const project = projection(prepared, kernel.projector, map);
  const betweenGroup = record.betweenGroup.share ** 2;
  const ofLower = options.pair === 'V2/V3';
  const { theta } = kernel;

  const solveMany = (absorbances: Float64Array, out?: ManyResults): ManyResults => {
    const count = rowsOf(absorbances, wavelengths.length, out);
    const into = out ?? {
      stateOfCharge: new Float64Array(count),
      uncertainty: new Float64Array(count),
      totalVanadium: new Float64Array(count),
      chiSquare: new Float64Array(count),
    };
    const { stateOfCharge, uncertainty, totalVanadium, chiSquare } = into;
    for (let row = 0; row < count; row++) {
      project.row(absorbances, row * wavelengths.length);
      const misfit = kernel.solve(project.w);
      const total = theta[0]! + theta[1]!;
      if (stateOfCharge) stateOfCharge[row] = (ofLower ? theta[0]! : theta[1]!) / total;
      if (totalVanadium) totalVanadium[row] = total * dilution;
      if (uncertainty) uncertainty[row] = Math.sqrt(kernel.shareVariance() + betweenGroup);
      if (chiSquare) chiSquare[row] = Math.max(0, project.norm() + misfit);
    }
    return into;
  };
  return { degreesOfFreedom: prepared.used.length - 2, solveMany: solveMany as PreparedMany['solveMany'] };
}

/** The linear part: a row of the caller's matrix to `w`, and its squared whitened length. */
function projection(
  prepared: Prepared,
  rows: readonly Float64Array[],
  { width, start, weight }: AxisMap,
): { readonly w: Float64Array; row(absorbances: Float64Array, offset: number): void; norm(): number } {
  const count = start.length;
  // Four sums at a time keep a processor busy; rows of zeros fill up.
  const dimension = Math.ceil(rows.length / 4) * 4;
  const means = new Float64Array(count);
  const w = new Float64Array(dimension);
  const flat = new Float64Array(count * dimension);
  rows.forEach((row, j) => row.forEach((value, l) => (flat[l * dimension + j] = value)));
  const row = (absorbances: Float64Array, offset: number): void => {
    for (let l = 0, at = 0; l < count; l++, at += width) {
      const from = offset + start[l]!;
      let sum = 0;
      for (let i = 0; i < width; i++) sum += weight[at + i]! * absorbances[from + i]!;
      means[l] = sum;
    }
    for (let j = 0; j < dimension; j += 4) {
      let [a, b, c, d] = [0, 0, 0, 0];
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
  return { w, row, norm: () => whitenedNorm(prepared.whitening, means) };
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

function rowsOf(absorbances: Float64Array, points: number, out: ManyResults | undefined): number {
  const count = absorbances.length / points;
  if (!Number.isInteger(count))
    throw new TankhueError(
      'length-differs',
      `expected a multiple of ${points} absorbances, one row a spectrum; received ${absorbances.length}`,
      'absorbances',
      'pass the spectra one after the other, each on the whole axis',
    );
  for (const [name, array] of Object.entries(out ?? {}))
    if (array !== undefined && array.length < count)
      throw new TankhueError(
        'length-differs',
        `expected room for ${count} results; received ${array.length}`,
        `out.${name}`,
        'make the array as long as there are spectra',
      );
  return count;
}

function requireInRange(name: string, value: number, above: number, unit: string): void {
  if (value > above && value < Infinity) return;
  throw new TankhueError(
    'out-of-range',
    `expected ${name === 'dilution' ? '1 or more' : `more than ${above} ${unit}`}; received ${value}`,
    name,
    name === 'dilution' ? 'write 20 for 1 mL made up to 20 mL' : 'state the path in cm',
  );
}

function requireAscending(wavelengths: Float64Array): void {
  for (let i = 0; i < wavelengths.length; i++)
    if (!(wavelengths[i]! > (i === 0 ? -Infinity : wavelengths[i - 1]!) && wavelengths[i]! < Infinity))
      throw new TankhueError(
        'axis-turns',
        `expected finite wavelengths in nm that only rise; received ${wavelengths[i]}`,
        `wavelengths[${i}]`,
        'sort the points of every spectrum, shortest wavelength first',
      );
}
