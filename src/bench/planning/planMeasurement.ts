// What        Which cell, which dilution and how many fillings give the wished uncertainty of the state of charge.
// Equation    for each cell × dilution: `cuvetteDesign.ts` (information), `measurementBudget.ts` (causes, repeats).
// Why so      the plan uses the estimator and the budget of the assay itself, so that what it promises is what the assay will report.
// Valid for   the estimate of the sample given; a sample far from it is planned again. Inside the calibration's pair.
// Units       tank concentrations mol/L; ℓ cm; uncertainty of the state of charge 1 (0.01 is a point); total vanadium relative.
// Source      ours; ceilings and limits for faint and dark: common practice, no source (see `assay`).
import type { Finding } from '../../finding.ts';
import { TankhueError } from '../../errors.ts';
import { PAIR_OF_SIDE, type Side } from '../../electrolyte/species.ts';
import {
  designCuvette,
  RangeSolver,
  type Cuvette,
  type CuvetteDesign,
  type PhotometerTraits,
} from './cuvetteDesign.ts';
import { measurementBudget, repeatsFor, uncertaintyAfter, type PlannedLine } from './measurementBudget.ts';
import type { MeasurementModel } from './measurementModel.ts';

export interface CellAtHand {
  readonly name: string;
  /** cm */
  readonly pathLength: number;
  /** relative, shared by all fillings, and from filling to filling */
  readonly pathUncertainty: number;
  readonly fillingScatter: number;
}

export interface DilutionAtHand {
  /** tank over cuvette, 1 or more */
  readonly factor: number;
  /** relative */
  readonly uncertainty: number;
  /** how it is made, e.g. `5 mL pipette into 100 mL flask`; empty for undiluted */
  readonly glassware: string;
}

/** What is thought to be in the tank. */
export interface ExpectedSample {
  readonly side: Side;
  /** mol/L */
  readonly totalVanadium: number;
  /** 0…1; for a composite the share of V(IV), that is the mean oxidation state minus 3 */
  readonly stateOfCharge: number;
}

export interface MeasurementWish {
  /** standard uncertainty of the state of charge, 1 */
  readonly stateOfCharge: number;
  /** most fillings anybody would make */
  readonly mostFillings: number;
}

export const DEFAULT_WISH: MeasurementWish = { stateOfCharge: 0.01, mostFillings: 6 };

/** `good`: reaches the wish; `repeat`: with several fillings; `short`: never does; `dark`, `faint`: an assay would withhold it. */
export type CandidateGrade = 'good' | 'repeat' | 'short' | 'faint' | 'dark';

export interface PlannedCandidate {
  cell: string;
  /** cm */
  pathLength: number;
  dilution: number;
  glassware: string;
  grade: CandidateGrade;
  /** of one filling, k = 1; null where the species cannot be told apart */
  uncertainty: { stateOfCharge: number; totalVanadium: number } | null;
  /** to reach the wish; null when no number does */
  fillings: number | null;
  /** after those fillings */
  uncertaintyAfterFillings: { stateOfCharge: number; totalVanadium: number } | null;
  largestAbsorbance: number;
  /** total vanadium in the cuvette, mol/L, and whether standards of about that concentration were measured */
  cuvetteTotal: number;
  isAmongStandards: boolean;
  /** nm, ranges above the ceiling */
  darkRanges: [number, number][];
  /** shortest range of wavelengths that costs no more than a tenth of the uncertainty, nm */
  sufficientRange: [number, number] | null;
  /** u(S) without wavelengths below 450 nm over u(S) with them; 1 where there are none */
  tailReliance: number;
  /** share of the lower species bound in complexes: in the tank and in the cuvette */
  bound: { tank: number; cuvette: number };
  budget: PlannedLine[];
}

export interface MeasurementPlan {
  schema: 'tankhue/measurement-plan/1';
  sample: ExpectedSample;
  wish: MeasurementWish;
  /** best first */
  candidates: PlannedCandidate[];
  /** null when none can be used */
  advice: PlannedCandidate | null;
  /** the best that needs no dilution, where the advice is to dilute; null otherwise */
  undiluted: PlannedCandidate | null;
  /** cells to buy, with what they would give; empty when the drawer will do */
  wouldHelp: PlannedCandidate[];
  findings: Finding[];
  assumed: string[];
}

/** Paths on the market, cm: 0.1, 0.2, 0.5, 1, 2, 5, 10 mm [common practice]. */
export const MARKET_PATHS: readonly number[] = [0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1];

/** V(V) has no bands but a steep tail towards the violet; below this wavelength it is mostly that [common practice]. */
const TAIL_BELOW = 450;
/** Limits of an assay: u(S) above which it is withheld, information that must be left below the ceiling. */
const FAINT = 0.05;
const INFORMATION_NEEDED = 0.6;
/** A range may cost this factor in uncertainty to be called sufficient. */
const SUFFICIENT = 1.1;

/**
 * @param cells the drawer
 * @param dilutions what the glassware at hand makes; 1 for undiluted is one of them only if it is listed
 * @throws TankhueError `no-cells`, `no-dilutions`, `sample-impossible`, `wish-impossible`
 */
export function planMeasurement(
  model: MeasurementModel,
  sample: ExpectedSample,
  photometer: PhotometerTraits,
  cells: readonly CellAtHand[],
  dilutions: readonly DilutionAtHand[],
  wish: MeasurementWish = DEFAULT_WISH,
): MeasurementPlan {
  refuseImpossible(model, sample, cells, dilutions, wish);
  const tank = tankConcentrations(sample);
  const boundInTank = boundShare(model, tank.lower, tank.higher);
  const plan = (cell: CellAtHand) =>
    dilutions.map((dilution) => candidateFor(model, tank, boundInTank, photometer, cell, dilution, wish));
  const candidates = cells.flatMap(plan).sort(byMerit);
  const best = candidates[0]!;
  const advice = isUsable(best) ? best : null;
  const wouldHelp = best.grade === 'good' || best.grade === 'repeat' ? [] : helpFromMarket(plan, cells, best);
  return {
    schema: 'tankhue/measurement-plan/1',
    sample,
    wish,
    candidates,
    advice,
    undiluted: advice && advice.dilution > 1 ? (candidates.find((c) => c.dilution === 1 && isUsable(c)) ?? null) : null,
    wouldHelp,
    findings: doubtsAboutPlan(model, best, advice, wouldHelp, wish),
    assumed: [
      `the sample holds ${sample.totalVanadium} mol/L vanadium at ${(100 * sample.stateOfCharge).toFixed(0)} %, within the range of the calibration`,
      'fresh fillings draw noise, baseline, dust and the filling anew; cell, dilution, wavelength axis and calibration stay what they are',
      'dilution with the same acid, mixed before topping up',
    ],
  };
}

function refuseImpossible(
  model: MeasurementModel,
  sample: ExpectedSample,
  cells: readonly CellAtHand[],
  dilutions: readonly DilutionAtHand[],
  wish: MeasurementWish,
): void {
  const refuse = (code: string, message: string, where: string, hint: string) => {
    throw new TankhueError(code, message, where, hint);
  };
  if (cells.length === 0)
    refuse(
      'no-cells',
      'expected at least one cell; received none',
      'cells',
      'name the cells in the drawer by their path, such as 0.1mm, 1mm, 10mm',
    );
  if (dilutions.length === 0)
    refuse('no-dilutions', 'expected at least one dilution; received none', 'dilutions', 'write 1 for undiluted');
  for (const { factor } of dilutions)
    if (!(factor >= 1 && Number.isFinite(factor)))
      refuse(
        'dilution-impossible',
        `expected a dilution of 1 or more; received ${factor}`,
        'dilutions',
        'write tank volume over cuvette volume: 5 mL made up to 100 mL is 20',
      );
  for (const { name, pathLength } of cells)
    if (!(pathLength > 0 && Number.isFinite(pathLength)))
      refuse(
        'path-impossible',
        `expected a path above 0 mm for cell ${name}; received ${10 * pathLength} mm`,
        'cells',
        'write the path engraved on the cell, with its unit',
      );
  if (!(sample.totalVanadium > 0 && Number.isFinite(sample.totalVanadium)))
    refuse(
      'sample-impossible',
      `expected total vanadium above 0 mol/L; received ${sample.totalVanadium} mol/L`,
      'sample.totalVanadium',
      'write the fill record, 1.6 mol/L if nothing is known',
    );
  if (!(sample.stateOfCharge >= 0 && sample.stateOfCharge <= 1))
    refuse(
      'sample-impossible',
      `expected a state of charge from 0 to 1; received ${sample.stateOfCharge}`,
      'sample.stateOfCharge',
      'write 50 % if nothing is known',
    );
  if (PAIR_OF_SIDE[sample.side] !== model.pair)
    refuse(
      'pair-differs',
      `expected a calibration for ${PAIR_OF_SIDE[sample.side]} on the ${sample.side} side; received one for ${model.pair}`,
      'calibration',
      'choose the pair of the side',
    );
  if (!(wish.stateOfCharge > 0) || !(wish.mostFillings >= 1))
    refuse(
      'wish-impossible',
      `expected an uncertainty above 0 points and 1 filling or more; received ${100 * wish.stateOfCharge} points, ${wish.mostFillings} fillings`,
      'wish',
      'half a point to two points is what assays reach',
    );
}

/** Totals of the lower and the higher species of the side's pair, mol/L. */
function tankConcentrations({ side, totalVanadium, stateOfCharge }: ExpectedSample): { lower: number; higher: number } {
  // The charged state of the negative is the lower of its pair, elsewhere it is the higher.
  const higher = side === 'negative' ? 1 - stateOfCharge : stateOfCharge;
  return { lower: totalVanadium * (1 - higher), higher: totalVanadium * higher };
}

function boundShare(model: MeasurementModel, lower: number, higher: number): number {
  if (!(lower > 0)) return 0;
  const count = model.spectra.length;
  const { amount } = model.amounts(lower, higher, {
    amount: new Float64Array(count),
    byLower: new Float64Array(count),
    byHigher: new Float64Array(count),
  });
  return model.boundLower.reduce((sum, each, j) => sum + each * amount[2 + j]!, 0) / lower;
}

function candidateFor(
  model: MeasurementModel,
  tank: { lower: number; higher: number },
  boundInTank: number,
  photometer: PhotometerTraits,
  cell: CellAtHand,
  dilution: DilutionAtHand,
  wish: MeasurementWish,
): PlannedCandidate {
  const cuvette: Cuvette = { ...cell, lower: tank.lower / dilution.factor, higher: tank.higher / dilution.factor };
  const design = designCuvette(model, cuvette, photometer);
  const budget = measurementBudget(model, design, cuvette, dilution.uncertainty);
  const uncertainty = budget && uncertaintyAfter(budget, 1);
  const needed = budget && repeatsFor(budget, wish.stateOfCharge);
  const fillings = needed !== null && needed <= wish.mostFillings ? needed : null;
  return {
    cell: cell.name,
    pathLength: cell.pathLength,
    dilution: dilution.factor,
    glassware: dilution.glassware,
    grade: gradeOf(model, design, uncertainty?.stateOfCharge ?? Infinity, fillings),
    uncertainty,
    fillings,
    uncertaintyAfterFillings: budget && fillings !== null ? uncertaintyAfter(budget, fillings) : null,
    largestAbsorbance: design.absorbance.reduce((a, b) => Math.max(a, b), -Infinity),
    cuvetteTotal: cuvette.lower + cuvette.higher,
    isAmongStandards: isAmongStandards(model, cuvette.lower + cuvette.higher),
    darkRanges: darkRanges(model.wavelength, design.usable),
    ...rangesOf(model, design, cuvette),
    bound: { tank: boundInTank, cuvette: boundShare(model, cuvette.lower, cuvette.higher) },
    budget: budget ?? [],
  };
}

function gradeOf(model: MeasurementModel, design: CuvetteDesign, u: number, fillings: number | null): CandidateGrade {
  if (informationLeft(model, design.usable) < INFORMATION_NEEDED) return 'dark';
  if (!(u <= FAINT)) return 'faint';
  if (fillings === null) return 'short';
  return fillings === 1 ? 'good' : 'repeat';
}

/** Part of the squared difference between the two species' spectra below the ceiling: the assay withholds under the same limit. */
function informationLeft({ spectra }: MeasurementModel, usable: readonly boolean[]): number {
  let all = 0;
  let left = 0;
  usable.forEach((isUsed, i) => {
    const weight = (spectra[0]![i]! - spectra[1]![i]!) ** 2;
    all += weight;
    if (isUsed) left += weight;
  });
  return left / all;
}

/** Within the standards' totals, a tenth either way [common practice]. */
const isAmongStandards = ({ standardTotals: [low, high] }: MeasurementModel, total: number): boolean =>
  total > 0.9 * low && total < 1.1 * high;

function darkRanges(wavelength: Float64Array, usable: readonly boolean[]): [number, number][] {
  const ranges: [number, number][] = [];
  usable.forEach((isUsed, i) => {
    if (isUsed) return;
    if (i > 0 && !usable[i - 1]) ranges[ranges.length - 1]![1] = wavelength[i]!;
    else ranges.push([wavelength[i]!, wavelength[i]!]);
  });
  return ranges;
}

/** Every range of wavelengths is tried: each start against the nearest end that is still sufficient. */
function rangesOf(
  { wavelength }: MeasurementModel,
  design: CuvetteDesign,
  { lower, higher }: Cuvette,
): Pick<PlannedCandidate, 'sufficientRange' | 'tailReliance'> {
  const solver = new RangeSolver(design, lower, higher);
  const count = wavelength.length;
  const whole = solver.solve(0, count);
  if (!whole) return { sufficientRange: null, tailReliance: 1 };
  const limit = whole.share * SUFFICIENT ** 2;
  let shortest: [number, number] | null = null;
  // The variance falls as the end moves out and rises as the start moves in, so the nearest sufficient end only moves out.
  let end = 1;
  for (let start = 0; start < count; start++) {
    const isEnough = () => (solver.solve(start, end)?.share ?? Infinity) <= limit;
    while (end < count && !isEnough()) end += 1;
    if (end === count && !isEnough()) break;
    if (!shortest || wavelength[end - 1]! - wavelength[start]! < shortest[1] - shortest[0])
      shortest = [wavelength[start]!, wavelength[end - 1]!];
  }
  const firstAbove = wavelength.findIndex((nm) => nm >= TAIL_BELOW);
  const without = firstAbove > 0 ? (solver.solve(firstAbove, count)?.share ?? Infinity) : whole.share;
  return { sufficientRange: shortest, tailReliance: Math.sqrt(without / whole.share) };
}

const GRADES: readonly CandidateGrade[] = ['good', 'repeat', 'short', 'faint', 'dark'];

const isUsable = ({ grade }: PlannedCandidate): boolean => GRADES.indexOf(grade) < GRADES.indexOf('faint');

/** Grade, then a concentration that was calibrated, then fewest fillings, then u(S) in steps of a tenth, then u(total). */
function byMerit(a: PlannedCandidate, b: PlannedCandidate): number {
  const step = ({ uncertainty }: PlannedCandidate) =>
    uncertainty ? Math.round(Math.log(uncertainty.stateOfCharge) / Math.log(1.1)) : Infinity;
  return (
    GRADES.indexOf(a.grade) - GRADES.indexOf(b.grade) ||
    Number(b.isAmongStandards) - Number(a.isAmongStandards) ||
    (a.fillings ?? Infinity) - (b.fillings ?? Infinity) ||
    step(a) - step(b) ||
    (a.uncertainty?.totalVanadium ?? Infinity) - (b.uncertainty?.totalVanadium ?? Infinity)
  );
}

/** The best candidate of each path on the market that nobody has, where it does better than the drawer. */
function helpFromMarket(
  plan: (cell: CellAtHand) => PlannedCandidate[],
  cells: readonly CellAtHand[],
  best: PlannedCandidate,
): PlannedCandidate[] {
  return MARKET_PATHS.filter((path) => cells.every(({ pathLength }) => Math.abs(pathLength / path - 1) > 0.05))
    .map((pathLength) => plan(marketCell(pathLength)).sort(byMerit)[0]!)
    .filter((candidate) => isUsable(candidate) && byMerit(candidate, best) < 0)
    .sort(byMerit)
    .slice(0, 2);
}

/** A cell nobody measured: its path is known to 1 %, and below 0.3 mm it differs by 3 % from filling to filling [common practice]. */
export const marketCell = (pathLength: number): CellAtHand => ({
  name: `${Number((10 * pathLength).toPrecision(3))} mm`,
  pathLength,
  pathUncertainty: 0.01,
  fillingScatter: pathLength < 0.03 ? 0.03 : 0,
});

/** Causes that belong to the calibration, whatever the cuvette. */
const OF_CALIBRATION = /standards|calibration/;

function doubtsAboutPlan(
  model: MeasurementModel,
  best: PlannedCandidate,
  advice: PlannedCandidate | null,
  wouldHelp: readonly PlannedCandidate[],
  wish: MeasurementWish,
): Finding[] {
  const findings: Finding[] = [];
  const say = (code: string, severity: Finding['severity'], message: string, hint: string) =>
    findings.push({ code, severity, message, hint });
  const wished = `${inPoints(wish.stateOfCharge)} points`;
  const reached = best.uncertainty ? `${inPoints(best.uncertainty.stateOfCharge)} points` : 'no number';
  const buy =
    wouldHelp.length > 0
      ? `a ${wouldHelp[0]!.cell} cell at dilution ${wouldHelp[0]!.dilution} would give ${inPoints(wouldHelp[0]!.uncertainty!.stateOfCharge)} points`
      : 'no cell on the market does better with these dilutions: dilute otherwise, or improve the photometer';
  if (!advice)
    say(
      'no-usable-cell',
      'withhold',
      `expected a cell and a dilution that an assay can use; received ${reached} at best (${best.cell}, dilution ${best.dilution}: ${best.grade})`,
      buy,
    );
  else if (best.grade === 'short') {
    const systematic = best.budget.find(({ isRandom }) => !isRandom);
    const isOfCalibration = systematic !== undefined && OF_CALIBRATION.test(systematic.source);
    say(
      'wish-out-of-reach',
      'caution',
      `expected u(S) of ${wished} or better; received ${reached} at best, and ${wish.mostFillings} fillings do not reach it${systematic ? `: ${systematic.source} alone is ${inPoints(systematic.stateOfCharge)} points` : ''}`,
      isOfCalibration
        ? 'calibrate with standards from more preparations, nearer to this composition: no cell and no dilution mends that'
        : buy,
    );
  }
  if (!advice) return findings;
  if (!advice.isAmongStandards)
    say(
      'outside-calibration',
      'caution',
      `standards held ${model.standardTotals.map((c) => c.toFixed(2)).join(' to ')} mol/L in the cuvette, this plan ${advice.cuvetteTotal.toPrecision(2)} mol/L: the uncertainty counts what the model knows, not whether it holds there`,
      'measure standards at that dilution too, or check one sample at two dilutions',
    );
  if (advice.bound.tank - advice.bound.cuvette > 0.05)
    say(
      'complex-dissociates',
      'note',
      `the complex breaks up on dilution: ${percent(advice.bound.tank)} of the lower species is bound in the tank, ${percent(advice.bound.cuvette)} in the cuvette`,
      'write the dilution on the sheet: the assay solves the equilibrium at the concentration of the cuvette',
    );
  if (advice.darkRanges.length > 0)
    say(
      'partly-dark',
      'note',
      `above the ceiling of absorbance at ${advice.darkRanges.map(([from, to]) => `${from}-${to}`).join(', ')} nm: these wavelengths are not used`,
      'nothing needs doing; a thinner cell would use them',
    );
  if (advice.tailReliance > 1.25)
    say(
      'leans-on-tail',
      'caution',
      `without wavelengths below ${TAIL_BELOW} nm u(S) would be ${advice.tailReliance.toFixed(1)} times as large: the answer leans on the violet tail, where stray light and the self-association of V(V) are strongest`,
      'verify stray light there, or choose a cell and a dilution that show the bands better',
    );
  return findings;
}

const inPoints = (share: number): string => (100 * share).toPrecision(2);
const percent = (share: number): string => `${(100 * share).toFixed(share < 0.1 ? 1 : 0)} %`;
