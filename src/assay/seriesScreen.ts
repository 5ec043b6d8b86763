// What        The fast look at one row of a series: its numbers and the doubts that need no full assay.
// Equation    numbers of the side's own pair by `rowSolver.ts`; doubts by the limits of the full assay.
// Why so      A thousand times faster than a full assay, and blind to what only one direction in the spectrum shows: it says that something
//             is wrong, not what.
// Valid for   one side, one cuvette, one axis.
// Units       mol/L of the tank, state of charge 1.
// Source      ours.
import type { Finding, Severity } from '../finding.ts';
import { PAIR_OF_SIDE, type Pair, type Side } from '../electrolyte/species.ts';
import { TankhueError } from '../errors.ts';
import { averager, axisMap } from '../estimation/kernelAxis.ts';
import { rowSolver, type RowSolver } from '../estimation/rowSolver.ts';
import type { CalibrationInUse } from './assaySample.ts';
import { MATCH_CAUTION, MATCH_WITHHOLD } from './opticalFindings.ts';
import { matchOf } from './pairFit.ts';
import { ASSUMED_DILUTION_UNCERTAINTY, type AssayOptions } from './sample.ts';
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

export interface Screened {
  readonly pair: Pair;
  /** which doubts there are, one bit each */
  readonly doubts: number;
  /** too little light was absorbed, or too few points are left, for the numbers to mean anything */
  readonly meaningless: boolean;
  readonly stateOfCharge: number;
  readonly uncertainty: number;
  readonly total: number;
  readonly totalUncertainty: number;
  readonly match: number;
}

const DOUBT = {
  failed: 1,
  hollow: 2,
  masked: 4,
  unlike: 8,
  poor: 16,
  faint: 32,
  unsure: 64,
  uncertain: 128,
  impossible: 256,
  outside: 512,
} as const;

/** What each doubt says, worst first. */
const SAID: ReadonlyArray<readonly [number, string, Severity, string, string]> = [
  [
    DOUBT.failed,
    'too-few-wavelengths',
    'withhold',
    'too few wavelengths have a value',
    'look at the cell and the lamp',
  ],
  [
    DOUBT.hollow,
    'over-ceiling',
    'withhold',
    'most wavelengths were too dark or without a value',
    'use a thinner cell, or dilute with the same acid',
  ],
  [
    DOUBT.masked,
    'over-ceiling',
    'caution',
    'some wavelengths were too dark or without a value and were not used',
    'use a thinner cell, or dilute with the same acid',
  ],
  [DOUBT.faint, 'too-faint', 'withhold', 'hardly any absorbance is left', 'is the cell filled? look for gas'],
  [DOUBT.unsure, 'uncertain', 'withhold', 'the state of charge is known to worse than 5 points', 'look at the cell'],
  [DOUBT.uncertain, 'uncertain', 'caution', 'the state of charge is known to worse than 2 points', 'look at the cell'],
  [
    DOUBT.unlike,
    'poor-match',
    'withhold',
    `the misfit is more than ${MATCH_WITHHOLD} standard deviations above that of standards`,
    'look at the cell and the lamp, then at the calibration',
  ],
  [
    DOUBT.poor,
    'poor-match',
    'caution',
    `the misfit is more than ${MATCH_CAUTION} standard deviations above that of standards`,
    'look at the cell and the lamp, then at the calibration',
  ],
  [
    DOUBT.impossible,
    'outside-calibration',
    'withhold',
    'the spectrum asks for less than none of one state: other states may be there',
    'assay a sample on its own',
  ],
  [
    DOUBT.outside,
    'outside-calibration',
    'caution',
    'concentration or state of charge lie outside the standards',
    'extend the calibration with standards there',
  ],
];

/** Findings without a full assay: that there is a doubt, not its cause. */
export const screenFindings = ({ doubts }: Screened): Finding[] =>
  SAID.filter(([bit]) => (doubts & bit) !== 0).map(([, code, severity, message, hint]) => ({
    code,
    severity,
    message,
    hint,
  }));

/** Part of the wavelengths that must be left: the full assay weighs them, and needs 60 % of the information. */
const HOLLOW = 0.6;
const FAINT = 0.1;
const MOST_MASKS = 24;

/** @throws TankhueError `not-calibrated`, `too-few-wavelengths` */
export function seriesScreen(
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
    if (masked && part === null) return { ...FAILED, pair: own };
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
    const within = (low: number, high: number): boolean => share > low - slack && share < high + slack;
    const doubtIf = (doubt: boolean, bit: number): number => (doubt ? bit : 0);
    const unsure = !(uncertainty <= UNCERTAIN_WITHHOLD && total > 0);
    const hollow = part !== null && part.used.length < HOLLOW * means.length;
    return {
      pair: own,
      meaningless: unsure,
      doubts:
        doubtIf(hollow, DOUBT.hollow) |
        doubtIf(masked && !hollow, DOUBT.masked) |
        doubtIf(unsure && largest < FAINT, DOUBT.faint) |
        doubtIf(unsure && !(largest < FAINT), DOUBT.unsure) |
        doubtIf(!unsure && uncertainty > UNCERTAIN_CAUTION, DOUBT.uncertain) |
        doubtIf(!(match <= MATCH_WITHHOLD), DOUBT.unlike) |
        doubtIf(match > MATCH_CAUTION && match <= MATCH_WITHHOLD, DOUBT.poor) |
        doubtIf(!unsure && !within(0, 1), DOUBT.impossible) |
        doubtIf(!unsure && !(within(...domain.share) && total <= ABOVE * domain.total[1]), DOUBT.outside),
      stateOfCharge: own === 'V2/V3' ? 1 - share : share,
      uncertainty,
      total: total * cuvette.dilution,
      totalUncertainty: cuvette.dilution * Math.hypot(solver.totalUncertainty(leverage), relativeDilution * total),
      match,
    };
  };
}

const FAILED: Omit<Screened, 'pair'> = {
  meaningless: true,
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
