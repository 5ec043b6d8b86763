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
import { WANTED, type FastRows } from './fastRows.ts';
import { averager, axisMap } from './kernelAxis.ts';
import { rowSolver, type PairOnGrid, type RowCuvette } from './rowSolver.ts';

/** What of a calibration is needed. */
export interface PairsOnGrid {
  readonly grid: { readonly step: number };
  readonly pairs: readonly PairOnGrid[];
}

export interface ManyOptions extends RowCuvette {
  readonly pair: Pair;
  /** ≥ 1; 1 when absent */
  readonly dilution?: number;
}

/** One number a spectrum. An array that is left out is not computed. */
export interface ManyResults {
  /** share of V2, V4, V5 for V2/V3, V3/V4, V4/V5; not clipped */
  stateOfCharge?: Float64Array;
  /** standard uncertainty of the state of charge */
  uncertainty?: Float64Array;
  /** mol/L of the tank */
  totalVanadium?: Float64Array;
  /** standard uncertainty of the total, the dilution taken as exact */
  totalUncertainty?: Float64Array;
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
  const { pathLength, dilution = 1 } = options;
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
  const map = axisMap(wavelengths, record.model.wavelength, calibration.grid.step);
  const { means, average } = averager(map);
  const solver = rowSolver(record, map.reached, options);
  const { theta } = solver;
  const ofLower = options.pair === 'V2/V3';

  const points = wavelengths.length;
  const fast = solver.fast(map, points);

  /** One row by the plain solver. */
  const solveRow = (absorbances: Float64Array, row: number, into: ManyResults): void => {
    const { stateOfCharge, uncertainty, totalVanadium, totalUncertainty, chiSquare } = into;
    average(absorbances, row * points);
    solver.solve(means);
    const total = theta[0]! + theta[1]!;
    if (stateOfCharge) stateOfCharge[row] = (ofLower ? theta[0]! : theta[1]!) / total;
    if (totalVanadium) totalVanadium[row] = total * dilution;
    if (uncertainty || totalUncertainty) {
      const leverage = solver.leverage();
      if (uncertainty) uncertainty[row] = solver.shareUncertainty(leverage);
      if (totalUncertainty) totalUncertainty[row] = solver.totalUncertainty(leverage) * dilution;
    }
    if (chiSquare) chiSquare[row] = solver.chiSquare();
  };

  /** As many rows as the fast code takes at once; those it leaves by the plain solver. */
  const solveBlock = (
    code: FastRows,
    absorbances: Float64Array,
    first: number,
    end: number,
    into: ManyResults,
  ): void => {
    const { stateOfCharge, uncertainty, totalVanadium, totalUncertainty, chiSquare } = into;
    code.input.set(absorbances.subarray(first * points, end * points));
    code.run(end - first, wantedIn(into));
    for (let r = 0, row = first; row < end; r++, row++) {
      if (code.left[r] !== 0) {
        solveRow(absorbances, row, into);
        continue;
      }
      const total = code.lower[r]! + code.higher[r]!;
      if (stateOfCharge) stateOfCharge[row] = (ofLower ? code.lower[r]! : code.higher[r]!) / total;
      if (totalVanadium) totalVanadium[row] = total * dilution;
      if (uncertainty) uncertainty[row] = code.shareUncertainty[r]!;
      if (totalUncertainty) totalUncertainty[row] = code.totalUncertainty[r]! * dilution;
      if (chiSquare) chiSquare[row] = code.chiSquare[r]!;
    }
  };

  const solveMany = (absorbances: Float64Array, out?: ManyResults): ManyResults => {
    const count = rowsOf(absorbances, points, out);
    const into = out ?? allResults(count);
    if (fast)
      for (let first = 0; first < count; first += fast.rows)
        solveBlock(fast, absorbances, first, Math.min(count, first + fast.rows), into);
    else for (let row = 0; row < count; row++) solveRow(absorbances, row, into);
    return into;
  };
  return { degreesOfFreedom: solver.degreesOfFreedom, solveMany: solveMany as PreparedMany['solveMany'] };
}

const wantedIn = ({ uncertainty, totalUncertainty, chiSquare }: ManyResults): number =>
  (uncertainty ? WANTED.share : 0) | (totalUncertainty ? WANTED.total : 0) | (chiSquare ? WANTED.chiSquare : 0);

const allResults = (count: number): Required<ManyResults> => ({
  stateOfCharge: new Float64Array(count),
  uncertainty: new Float64Array(count),
  totalVanadium: new Float64Array(count),
  totalUncertainty: new Float64Array(count),
  chiSquare: new Float64Array(count),
});

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
