// What        The likeliest reason why a standard disagrees with the others.
// Equation    none: what the others' fit finds in its spectrum, held against the label, its neighbours' labels, and the named cuvette faults.
// Why so      "Standard 17 is off" sends a person looking for hours; "its label and that of 19 seem to be swapped" for a minute.
// Valid for   a standard that `findDoubts` has accused.
// Units       share 1, total relative, offset absorbance, shift nm.
// Source      error fingerprints: common practice, no source.
import { cuvetteFaults, fittedCurve, scoreFaults, type FaultScore } from '../estimation/faults.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import type { Prepared } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import type { PairStandard } from './fitPair.ts';

/** What the fit of the undoubted standards finds in one spectrum. */
export interface Found {
  readonly row: PairStandard;
  /** share of the higher species, 1 */
  readonly share: number;
  /** total vanadium found/label − 1 */
  readonly totalError: number;
  /** relative */
  readonly pathShift: number;
  /** named cuvette faults, strongest first */
  readonly faults: readonly FaultScore[];
}

export function findIn(prepared: Prepared, row: PairStandard, priors: ModePriors): Found {
  const cuvette = {
    pathLength: row.pathLength,
    pathUncertainty: row.pathUncertainty,
    wavelengthUncertainty: priors.wavelengthShift,
  };
  const solution = solve(prepared, reduce(prepared, row.absorbance), cuvette);
  const fitted = fittedCurve(prepared, solution, row.pathLength).total;
  const total = solution.lower + solution.higher;
  return {
    row,
    share: solution.higher / total,
    totalError: total / (row.lower + row.higher) - 1,
    pathShift: solution.pathShift,
    faults: scoreFaults(prepared, row.absorbance, solution, cuvette, cuvetteFaults(prepared, fitted)).sort(
      (a, b) => Math.abs(b.score) - Math.abs(a.score),
    ),
  };
}

/** A score that no sound spectrum reaches, and what a baseline must be off by to matter. */
const CERTAIN = 8;
const VISIBLE_OFFSET = 0.005;
/** of the total, in stated path uncertainties */
const WRONG_CELL = 4;
/** shares that are the same within labels made by volume (common practice, no source) */
const SAME_SHARE = 0.02;
/** relative */
const SAME_TOTAL = 0.05;
/** accused of one group that are off alike: not one bottle, but what they share */
const WHOLE_GROUP = 3;

export const shareOf = (row: PairStandard): number => row.higher / (row.lower + row.higher);

/** @param others accused too: two bottles may have been swapped, a preparation may be off as a whole */
export function doubtReason(found: Found, others: readonly Found[]): string {
  const { row, share, totalError } = found;
  const twin = others.find(
    (other) => other !== found && holds(found, other.row) && holds(other, row) && !isSame(row, other.row),
  );
  if (twin) return `its label and that of ${twin.row.name} seem to be swapped`;
  if (isNear(share, 1 - shareOf(row)) && !isNear(share, shareOf(row)))
    return 'its two concentrations seem to be swapped on the label';
  const fault = reasonOfFault(found.faults[0]);
  if (fault) return fault;
  const alike = others.filter((other) => other.row.group === row.group && isOffAlike(other, found));
  const totalIsOff = Math.abs(totalError) > WRONG_CELL * row.pathUncertainty;
  if (alike.length >= WHOLE_GROUP)
    return totalIsOff
      ? `it and ${alike.length - 1} more of ${row.group} hold another total than their labels: wrong cell, or the stock they share`
      : `it and ${alike.length - 1} more of ${row.group} are off alike: the stock they share, or a model that does not reach this concentration`;
  if (totalIsOff)
    return `it holds ${Math.round(100 * (1 + totalError))} % of the vanadium on its label: wrong cell, or the wrong total on the label`;
  return share > shareOf(row) ? 'partly oxidised before the scan, or mixed wrong' : 'mixed wrong';
}

/** Off in the same direction, in share or in total. */
function isOffAlike(one: Found, other: Found): boolean {
  const shareError = ({ share, row }: Found): number => share - shareOf(row);
  return (
    (Math.abs(shareError(one)) > SAME_SHARE / 2 && shareError(one) * shareError(other) > 0) ||
    (Math.abs(one.totalError) > WRONG_CELL * one.row.pathUncertainty && one.totalError * other.totalError > 0)
  );
}

function reasonOfFault(fault: FaultScore | undefined): string | null {
  if (!fault || Math.abs(fault.score) < CERTAIN) return null;
  const { name, amplitude } = fault;
  if (name === 'offset' && Math.abs(amplitude) > VISIBLE_OFFSET)
    return `its baseline lies ${signed(amplitude, 3)} off: wrong blank, or a dirty window`;
  if (name.endsWith('scatter') && Math.abs(amplitude) > VISIBLE_OFFSET)
    return 'its baseline climbs towards the violet: turbid, a film, or another blank';
  if (name === 'light beside the sample' && amplitude > 0)
    return 'light passes beside the sample: a bubble, or too little in the cell';
  if (name === 'wavelength') return `its wavelengths are ${signed(amplitude, 1)} nm off: another photometer?`;
  return null;
}

const isSame = (a: PairStandard, b: PairStandard): boolean =>
  isNear(shareOf(a), shareOf(b)) && Math.abs((a.lower + a.higher) / (b.lower + b.higher) - 1) < SAME_TOTAL;
/** Whether the spectrum found in one bottle is what another label says. */
const holds = ({ row, share, totalError }: Found, label: PairStandard): boolean =>
  isNear(share, shareOf(label)) &&
  Math.abs(((1 + totalError) * (row.lower + row.higher)) / (label.lower + label.higher) - 1) <
    Math.max(SAME_TOTAL, 3 * row.pathUncertainty);
const isNear = (a: number, b: number): boolean => Math.abs(a - b) < SAME_SHARE;
const signed = (value: number, digits: number): string => `${value > 0 ? '+' : ''}${value.toFixed(digits)}`;
