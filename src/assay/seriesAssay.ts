// What        A series of spectra of one cell on one axis, each with its state of charge and every doubt about it.
// Equation    each row: fast solver of the side's own pair and a screen (masked points, match, uncertainty, share, total);
//             a full assay where the screen changes its mind or the match jumps, and at least every 100th row.
// Why so      A full assay costs a thousand times the fast solver. Neighbours of a series resemble each other, so what a full assay says
//             of one row holds for those after it until the screen sees a difference.
// Valid for   one side, one path, one dilution, one axis. A doubt that the screen cannot see shows up to 100 rows late.
// Units       mol/L of the tank, state of charge 1.
// Source      ours.
import type { Finding } from '../finding.ts';
import { PAIR_OF_SIDE, type Pair, type Side } from '../electrolyte/species.ts';
import { TankhueError } from '../errors.ts';
import { averager, axisMap } from '../estimation/kernelAxis.ts';
import { prepare, type Prepared } from '../estimation/prepare.ts';
import { rowSolver, type RowSolver } from '../estimation/rowSolver.ts';
import { makeSpectrum } from '../spectrum/spectrum.ts';
import { assaySample, type CalibrationInUse } from './assaySample.ts';
import { MATCH_CAUTION } from './opticalFindings.ts';
import { matchOf } from './pairFit.ts';
import type { AssayState, Quantity } from './result.ts';
import { ASSUMED_DILUTION_UNCERTAINTY, type AssayOptions, type Sample } from './sample.ts';
import { ABOVE, UNCERTAIN_CAUTION, UNCERTAIN_WITHHOLD } from './sampleFindings.ts';

/** What all spectra of a series share. */
export interface SeriesCuvette {
  readonly side: Side;
  /** cm */
  readonly pathLength: number;
  /** cm; null where nobody said */
  readonly pathUncertainty: number | null;
  /** ≥ 1 */
  readonly dilution: number;
  /** K; null where nobody said */
  readonly temperature: number | null;
}

/** One row. Numbers are null where they are withheld. */
export interface SeriesResult {
  readonly state: AssayState;
  readonly pair: Pair;
  readonly stateOfCharge: Quantity;
  /** mol/L of the tank */
  readonly totalVanadium: Quantity;
  /** standard deviations of the misfit above that of left-out standards */
  readonly match: number | null;
  readonly findings: readonly Finding[];
  /** the row before this one, counted in rows, whose full assay the findings come from; 0 for its own */
  readonly assayedBefore: number;
}

export interface SeriesAssay {
  /** Forgets the rows before: the next one gets a full assay, so that pieces of a series can be assayed in any order. */
  begin(): void;
  /** @param readings absorbances on the axis, row-major @param row index of the row */
  assay(readings: Float64Array, row: number): SeriesResult;
}

/** Rows from one full assay to the next when nothing changes. */
const FULL_EVERY = 100;
/** Change of the match since the last full assay that asks for another; from row to row it moves by a tenth. */
const JUMP = 1;
/** Masks that are kept prepared. */
const MOST_MASKS = 24;
const NOTHING: Quantity = { value: null, uncertainty: null };

interface Screened {
  /** which doubts the screen has, one bit each */
  readonly doubts: number;
  readonly stateOfCharge: number;
  readonly uncertainty: number;
  readonly total: number;
  readonly totalUncertainty: number;
  readonly match: number;
}

const DOUBT = { masked: 1, match: 2, uncertain: 4, unsure: 8, share: 16, total: 32, failed: 64 } as const;

/**
 * @param wavelength nm, ascending
 * @throws TankhueError `not-calibrated`, `too-few-wavelengths`
 */
export function seriesAssay(
  inUse: CalibrationInUse,
  cuvette: SeriesCuvette,
  wavelength: Float64Array,
  options: AssayOptions,
): SeriesAssay {
  const screen = screenOf(inUse, cuvette, wavelength, options);
  const full = fullAssay(inUse, cuvette, wavelength, options);
  let last: SeriesResult | null = null;
  let lastDoubts = 0;
  let since = 0;
  return {
    begin: () => {
      last = null;
    },
    assay: (readings, row) => {
      const screened = screen(readings, row * wavelength.length);
      since += 1;
      if (
        last === null ||
        screened.doubts !== lastDoubts ||
        Math.abs(screened.match - (last.match ?? NaN)) > JUMP ||
        since >= FULL_EVERY ||
        last.pair !== PAIR_OF_SIDE[cuvette.side]
      ) {
        last = full(readings.slice(row * wavelength.length, (row + 1) * wavelength.length));
        lastDoubts = screened.doubts;
        since = 0;
        return last;
      }
      const withheld = last.state === 'withheld';
      return {
        ...last,
        stateOfCharge: withheld ? NOTHING : { value: screened.stateOfCharge, uncertainty: screened.uncertainty },
        totalVanadium: withheld ? NOTHING : { value: screened.total, uncertainty: screened.totalUncertainty },
        match: Number.isFinite(screened.match) ? screened.match : null,
        assayedBefore: since,
      };
    },
  };
}

/** The fast look at one row. */
function screenOf(
  { calibration }: CalibrationInUse,
  cuvette: SeriesCuvette,
  wavelength: Float64Array,
  options: AssayOptions,
): (readings: Float64Array, offset: number) => Screened {
  const own = PAIR_OF_SIDE[cuvette.side];
  const record = calibration.pairs.find((pair) => pair.pair === own);
  if (!record)
    throw new TankhueError(
      'not-calibrated',
      `expected a calibration that holds ${own} for the ${cuvette.side} side; received ${calibration.pairs.map((pair) => pair.pair).join(', ')}`,
      '--calibration',
      'use a calibration of this side',
    );
  const map = axisMap(wavelength, record.model.wavelength, calibration.grid.step);
  const { means, average } = averager(map);
  const grid = Int32Array.from(map.reached.keys()).filter((g) => map.reached[g]);
  const rowCuvette = {
    pathLength: cuvette.pathLength,
    priors: options.priors,
    ...(cuvette.pathUncertainty === null ? {} : { pathUncertainty: cuvette.pathUncertainty / cuvette.pathLength }),
  };
  const whole = rowSolver(record, map.reached, rowCuvette);
  const masks = new Map<string, { solver: RowSolver; used: Int32Array; means: Float64Array } | null>();
  const underMask = (): { solver: RowSolver; used: Int32Array; means: Float64Array } | null => {
    const used = Int32Array.from(means.keys()).filter((l) => means[l]! <= options.ceiling);
    const key = used.join();
    if (!masks.has(key)) {
      if (masks.size >= MOST_MASKS) masks.delete(masks.keys().next().value!);
      const usable = new Uint8Array(record.model.wavelength.length);
      for (const l of used) usable[grid[l]!] = 1;
      masks.set(
        key,
        solverOrNull(() => ({
          solver: rowSolver(record, usable, rowCuvette),
          used,
          means: new Float64Array(used.length),
        })),
      );
    }
    return masks.get(key)!;
  };
  const { domain } = record;
  const relativeDilution = cuvette.dilution === 1 ? 0 : ASSUMED_DILUTION_UNCERTAINTY;

  return (readings, offset) => {
    average(readings, offset);
    let largest = -Infinity;
    let masked = false;
    for (let l = 0; l < means.length; l++) {
      if (means[l]! > largest && means[l]! <= options.ceiling) largest = means[l]!;
      if (!(means[l]! <= options.ceiling)) masked = true;
    }
    const part = masked ? underMask() : null;
    if (masked && part === null) return FAILED;
    const solver = part ? part.solver : whole;
    if (part) part.used.forEach((l, i) => (part.means[i] = means[l]!));
    solver.solve(part ? part.means : means);
    const lower = solver.theta[0]!;
    const higher = solver.theta[1]!;
    const total = lower + higher;
    const share = higher / total;
    const brightness = Math.max(1, largest / domain.absorbance);
    const leverage = solver.leverage();
    const uncertainty = solver.shareUncertainty(leverage, brightness);
    const reduced = solver.chiSquare() / (brightness * brightness * (1 + leverage)) / solver.degreesOfFreedom;
    const match = matchOf(record, reduced);
    const slack = 0.05 + 2 * uncertainty;
    const outside = !(share > domain.share[0] - slack && share < domain.share[1] + slack);
    return {
      doubts:
        (masked ? DOUBT.masked : 0) |
        (match <= MATCH_CAUTION ? 0 : DOUBT.match) |
        (uncertainty <= UNCERTAIN_CAUTION ? 0 : DOUBT.uncertain) |
        (uncertainty <= UNCERTAIN_WITHHOLD ? 0 : DOUBT.unsure) |
        (outside ? DOUBT.share : 0) |
        (total <= ABOVE * domain.total[1] && total > 0 ? 0 : DOUBT.total),
      stateOfCharge: own === 'V2/V3' ? 1 - share : share,
      uncertainty,
      total: total * cuvette.dilution,
      totalUncertainty: cuvette.dilution * Math.hypot(solver.totalUncertainty(leverage), relativeDilution * total),
      match,
    };
  };
}

const FAILED: Screened = {
  doubts: DOUBT.failed,
  stateOfCharge: NaN,
  uncertainty: NaN,
  total: NaN,
  totalUncertainty: NaN,
  match: NaN,
};

/** Too few wavelengths are a doubt of this row, not the end of the series. */
function solverOrNull<T>(make: () => T): T | null {
  try {
    return make();
  } catch (error) {
    if (error instanceof TankhueError) return null;
    throw error;
  }
}

/** The full assay of one row, preparations kept. */
function fullAssay(
  inUse: CalibrationInUse,
  cuvette: SeriesCuvette,
  wavelength: Float64Array,
  options: AssayOptions,
): (absorbance: Float64Array) => SeriesResult {
  const kept = new Map<string, Prepared>();
  const keeping: typeof prepare = (model, named, usable) => {
    const key = `${model.pair}:${usable ? Array.from(usable, (flag) => (flag ? 1 : 0)).join('') : ''}`;
    const known = kept.get(key);
    if (known) return known;
    if (kept.size >= MOST_MASKS) kept.delete(kept.keys().next().value!);
    const made = prepare(model, named, usable);
    kept.set(key, made);
    return made;
  };
  const sample: Omit<Sample, 'spectrum'> = {
    ...cuvette,
    name: '',
    system: '',
    blank: 'instrument',
    dilutionUncertainty: null,
    acid: null,
    takenAt: null,
    scannedAt: null,
    inertGas: null,
    cell: null,
    flask: null,
  };
  return (absorbance) => {
    try {
      const spectrum = makeSpectrum('', wavelength, absorbance);
      const found = assaySample({ ...sample, spectrum }, inUse, { ...options, keepCurves: false, prepare: keeping });
      const { value, uncertainty } = found.stateOfCharge;
      return {
        state: found.state,
        pair: found.pair,
        stateOfCharge: { value, uncertainty },
        totalVanadium: found.totalVanadium,
        match: found.fit?.match ?? null,
        findings: found.findings,
        assayedBefore: 0,
      };
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      return {
        state: 'withheld',
        pair: PAIR_OF_SIDE[cuvette.side],
        stateOfCharge: NOTHING,
        totalVanadium: NOTHING,
        match: null,
        findings: [{ code: error.code, severity: 'withhold', message: error.message, hint: error.hint }],
        assayedBefore: 0,
      };
    }
  };
}
