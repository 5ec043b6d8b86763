// What        A series of spectra of one cell on one axis, each with its state of charge and every doubt about it.
// Equation    each row: fast solver of the side's own pair and a screen; then the verdict of the nearest of the last full assays, when it is
//             near (same doubts; match, state of charge and ln total within 1, 0.05 and 0.1) and at most 100 rows old; else a full assay,
//             one in 100 rows at most; else the screen's own verdict.
// Why so      A full assay costs a thousand times the fast solver. Neighbours of a series resemble each other, so what a full assay says
//             of one row holds for rows like it, also in a series that goes back and forth.
// Valid for   one side, one path, one dilution, one axis. A doubt that the screen cannot see shows up to 100 rows late.
// Units       mol/L of the tank, state of charge 1.
// Source      ours.
import type { Finding } from '../finding.ts';
import { PAIR_OF_SIDE, type Pair } from '../electrolyte/species.ts';
import { TankhueError } from '../errors.ts';
import { prepare, type Prepared } from '../estimation/prepare.ts';
import { makeSpectrum } from '../spectrum/spectrum.ts';
import { assaySample, referenceFindings, type CalibrationInUse } from './assaySample.ts';
import type { AssayState, Quantity } from './result.ts';
import type { AssayOptions, Sample } from './sample.ts';
import { screenFindings, seriesScreen, type Screened, type SeriesCuvette } from './seriesScreen.ts';

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
  /** rows since the full assay that the findings come from, 0 for its own; null where they are the screen's */
  readonly assayedBefore: number | null;
}

export interface SeriesAssay {
  /** Forgets the rows before: the next one gets a full assay, so that pieces of a series can be assayed in any order. */
  begin(): void;
  /** @param readings absorbances on the axis, row-major @param row index of the row */
  assay(readings: Float64Array, row: number): SeriesResult;
}

/** Rows after which a full assay is renewed. */
const FULL_EVERY = 100;
/** How far a row may be from the one that was assayed: from row to row the match moves by a tenth. */
const NEAR = { match: 1, stateOfCharge: 0.05, logTotal: 0.1 } as const;
const REMEMBERED = 8;
/** Full assays that a piece may begin with, may save up, and earns with each row: a series that flickers must not take for ever. */
const ALLOWANCE = { begin: 2, most: 4, earned: 1 / 100 } as const;
/** Masks that are kept prepared. */
const MOST_MASKS = 24;
const NOTHING: Quantity = { value: null, uncertainty: null };

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
  const screen = seriesScreen(inUse, cuvette, wavelength, options);
  const full = fullAssay(inUse, cuvette, wavelength, options);
  const standing = referenceFindings(inUse);
  const own = PAIR_OF_SIDE[cuvette.side];
  let assayed: Assayed[] = [];
  let rows = 0;
  let allowance: number = ALLOWANCE.begin;
  /** One array for each set of doubts, so that rows that share findings share them. */
  const verdicts = new Map<number, SeriesResult>();
  const verdictOf = (screened: Screened): SeriesResult => {
    if (!verdicts.has(screened.doubts)) {
      const findings = [...screenFindings(screened), ...standing];
      verdicts.set(screened.doubts, { ...EMPTY, state: stateOf(findings), pair: own, findings });
    }
    return verdicts.get(screened.doubts)!;
  };
  return {
    begin: () => {
      assayed = [];
      allowance = ALLOWANCE.begin;
    },
    assay: (readings, row) => {
      const screened = screen(readings, row * wavelength.length);
      rows += 1;
      allowance = Math.min(ALLOWANCE.most, allowance + ALLOWANCE.earned);
      const fresh = nearest(
        assayed.filter((one) => rows - one.at < FULL_EVERY),
        screened,
      );
      const like = fresh ?? nearest(assayed, screened);
      if (!fresh && allowance >= 1) {
        allowance -= 1;
        const result = full(readings.slice(row * wavelength.length, (row + 1) * wavelength.length));
        assayed = [{ screened, result, at: rows }, ...assayed.slice(0, REMEMBERED - 1)];
        return result;
      }
      const verdict = like ? like.result : verdictOf(screened);
      const numbers = numbersOf(screened, verdict.state);
      return { ...verdict, ...numbers, assayedBefore: like ? rows - like.at : null };
    },
  };
}

interface Assayed {
  readonly screened: Screened;
  readonly result: SeriesResult;
  readonly at: number;
}

/** The full assay that speaks for a row; where it found another pair than the side's own, it speaks for nobody but itself. */
function nearest(assayed: readonly Assayed[], row: Screened): Assayed | null {
  let best: Assayed | null = null;
  let least = 1;
  for (const one of assayed) {
    if (one.screened.doubts !== row.doubts || one.result.pair !== row.pair) continue;
    const distance = distanceBetween(one.screened, row);
    if (distance > least) continue;
    best = one;
    least = distance;
  }
  return best;
}

/** 1 where a row is just near enough. Rows whose numbers mean nothing are near when they share their doubts. */
function distanceBetween(a: Screened, b: Screened): number {
  if (a.meaningless || b.meaningless) return a.meaningless && b.meaningless ? 0 : Infinity;
  return Math.max(
    Math.abs(a.match - b.match) / NEAR.match,
    Math.abs(a.stateOfCharge - b.stateOfCharge) / NEAR.stateOfCharge,
    Math.abs(Math.log(a.total / b.total)) / NEAR.logTotal,
  );
}

const EMPTY = { stateOfCharge: NOTHING, totalVanadium: NOTHING, match: null, assayedBefore: null } as const;

function stateOf(findings: readonly Finding[]): AssayState {
  if (findings.some((one) => one.severity === 'withhold')) return 'withheld';
  return findings.some((one) => one.severity === 'caution') ? 'caution' : 'sound';
}

function numbersOf(
  screened: Screened,
  state: AssayState,
): Pick<SeriesResult, 'stateOfCharge' | 'totalVanadium' | 'match'> {
  const match = Number.isFinite(screened.match) ? screened.match : null;
  if (state === 'withheld') return { stateOfCharge: NOTHING, totalVanadium: NOTHING, match };
  return {
    stateOfCharge: { value: screened.stateOfCharge, uncertainty: screened.uncertainty },
    totalVanadium: { value: screened.total, uncertainty: screened.totalUncertainty },
    match,
  };
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
