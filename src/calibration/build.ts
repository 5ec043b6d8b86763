import { TankhueError } from '../errors.ts';
import type { Finding } from '../finding.ts';
import type { Association } from '../electrolyte/association.ts';
import { PAIRS, speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { DEFAULT_CEILING } from '../estimation/cuvette.ts';
import { foreignSpectra, type ForeignSpectrum } from '../estimation/foreign.ts';
import { DEFAULT_MODE_PRIORS, type ModePriors } from '../estimation/namedModes.ts';
import type { Calibration, Grid, Matrix, PairCalibration, StandardRecord } from './calibration.ts';
import { candidateModels, choose, fitChoicesFor, type AssociationPlan, type Choice } from './choose.ts';
import { findDoubts } from './doubts.ts';
import { fitFindings } from './fitFindings.ts';
import { fitPair, type PairStandard, type PairStandards } from './fitPair.ts';
import { commonGrid } from './grid.ts';
import { faultScalesOf, pairRecord } from './pairRecord.ts';
import { sheetDoubts } from './sheetDoubts.ts';
import { dealToPairs, type Standard } from './standard.ts';
import { leaveGroupsOut } from './validate.ts';
import { standardRecords } from './standardRecords.ts';
import { standardsOnGrid } from './standardsOnGrid.ts';
import { totalBlocks } from './totalBlocks.ts';

export interface CalibrationRequest {
  readonly name: string;
  readonly source: string;
  readonly standards: readonly Standard[];
  /** names left out by decision; recorded */
  readonly without?: readonly string[];
  /** complexes to compare besides the usual ones */
  readonly associations?: readonly Association[];
  readonly grid?: Partial<Grid>;
  /** absorbance above which points are not used */
  readonly ceiling?: number;
  readonly priors?: ModePriors;
  readonly matrix?: Matrix;
  readonly provenance: Calibration['provenance'];
}

/** Fewest standards of a pair: two spectra, and one standard that can contradict them. */
const FEWEST_STANDARDS = 3;
const SHARE_FOLDS = 4;

/**
 * Builds a calibration for every pair that the standards can determine.
 * @param progress called with a pair and the share of its work done
 * @throws TankhueError when no pair can be determined, with the reason for each
 */
export function calibrate(
  request: CalibrationRequest,
  progress: (pair: Pair, done: number) => void = () => {},
): Calibration {
  requireDistinctNames(request.standards);
  const without = new Set(request.without ?? []);
  const kept = request.standards.filter((standard) => !without.has(standard.name));
  const unknown = [...without].filter((name) => !request.standards.some((standard) => standard.name === name));
  if (unknown.length > 0)
    throw new TankhueError(
      'unknown-standard',
      `expected the name of a standard in the sheet; received ${unknown.join(', ')}`,
      '--without',
      'copy the name from the sheet',
    );
  if (kept.length === 0)
    throw new TankhueError(
      'no-standards',
      'expected standards; received none',
      'standards sheet',
      'fill in a row for each cuvette',
    );
  const grid = commonGrid(
    kept.map((standard) => standard.spectrum),
    request.grid ?? {},
  );
  const priors = request.priors ?? DEFAULT_MODE_PRIORS;
  const findings: Finding[] = [
    ...[...without].map((name) => ({
      code: 'left-out-by-decision',
      severity: 'note' as const,
      message: `standard ${name} was left out by decision`,
      hint: 'write down why; the file keeps the name',
    })),
    ...sheetDoubts(kept),
  ];
  const built: BuiltPair[] = [];
  const records: StandardRecord[] = [];
  const refusals: TankhueError[] = [];
  const dealt = dealToPairs(kept);
  for (const pair of PAIRS) {
    const members = dealt.get(pair)!;
    if (!members.some((standard) => standard.role === 'calibration')) continue;
    try {
      const one = buildPair(pair, members, grid, request, priors, findings, (done) => progress(pair, done));
      built.push(one);
      records.push(...one.records);
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      refusals.push(error);
      findings.push({
        code: error.code,
        severity: 'caution',
        message: `${pair} could not be calibrated: ${error.message}`,
        hint: error.hint,
      });
    }
  }
  if (built.length === 0) throw refusals[0]!;
  const models = built.map((one) => one.pair.model);
  return {
    name: request.name,
    source: request.source,
    grid,
    matrix: request.matrix ?? { temperature: commonTemperature(kept), acid: null },
    pairs: built.map((one) => withForeignScores(one, foreignSpectra(one.pair.model, models), priors)),
    standards: records,
    findings,
    provenance: request.provenance,
  };
}

function requireDistinctNames(standards: readonly Standard[]): void {
  const seen = new Set<string>();
  for (const { name } of standards) {
    if (seen.has(name))
      throw new TankhueError(
        'name-repeats',
        `expected every standard to have a name of its own; received "${name}" twice`,
        'standards sheet, column standard',
        'number the fillings: A-1, A-2',
      );
    seen.add(name);
  }
}

function commonTemperature(standards: readonly Standard[]): number | null {
  const known = standards.map((standard) => standard.temperature).filter((value) => value !== null);
  return known.length === 0 ? null : known.reduce((sum, value) => sum + value, 0) / known.length;
}

/** A second look at the left-out standards, now that spectra of the states that must not be there are known. */
function withForeignScores(
  { pair, standards, choice }: BuiltPair,
  foreign: readonly ForeignSpectrum[],
  priors: ModePriors,
): PairCalibration {
  if (pair.leftOut.length === 0) return pair;
  const leftOut = leaveGroupsOut(standards, (subset) => fitChoicesFor(subset, choice), priors, foreign);
  return { ...pair, leftOut, faultScales: faultScalesOf(leftOut) };
}

interface BuiltPair {
  readonly standards: PairStandards;
  readonly choice: Choice;
  readonly pair: PairCalibration;
  readonly records: readonly StandardRecord[];
}

function buildPair(
  pair: Pair,
  members: readonly Standard[],
  grid: Grid,
  request: CalibrationRequest,
  priors: ModePriors,
  findings: Finding[],
  progress: (done: number) => void,
): BuiltPair {
  const { standards, used } = standardsOnGrid(pair, members, grid, request.ceiling ?? DEFAULT_CEILING, findings);
  const fitted = standards.rows.filter((_, i) => used[i]!.role === 'calibration');
  const training: PairStandards = { ...standards, rows: fitted };
  requireCompositions(training);
  const models = modelsThatCanBeTold(training, candidateModels(pair, request.associations ?? []), findings);
  const grouped = withGroups(training, models, findings);
  const chosen = choose(grouped, models, true, priors, progress);
  const choices = fitChoicesFor(grouped, chosen.choice);
  const fit = fitPair(grouped, choices);
  const record = pairRecord(grouped, fit, chosen, priors);
  const checks = standards.rows.filter((_, i) => used[i]!.role === 'check');
  findings.push(...fitFindings(record, fit, checks, priors));
  const doubts = findDoubts(grouped, fit, choices, priors);
  const { records, findings: accusations } = standardRecords(standards, used, fit, record, doubts, priors);
  findings.push(...accusations);
  return { standards: grouped, choice: chosen.choice, pair: record, records };
}

/** @throws TankhueError `too-few-compositions` */
function requireCompositions(standards: PairStandards): void {
  const shares = distinctShares(standards);
  const [lower, higher] = speciesOfPair(standards.pair);
  if (shares.length < 2)
    throw new TankhueError(
      'too-few-compositions',
      `two compositions between ${lower} and ${higher} are needed to tell them apart; ${shares.length} found`,
      'standards sheet',
      `add a standard with another share of ${higher}`,
    );
  if (standards.rows.length < FEWEST_STANDARDS)
    throw new TankhueError(
      'too-few-compositions',
      `${FEWEST_STANDARDS} standards of ${lower} and ${higher} are needed, so that one can contradict the others; ${standards.rows.length} found`,
      'standards sheet',
      'make seven shares at three totals, or at least three shares',
    );
}

/** per cent of the higher species, whole */
const shareOf = (row: PairStandard): number => Math.round((100 * row.higher) / (row.lower + row.higher));
const distinctShares = (standards: PairStandards): number[] => [...new Set(standards.rows.map(shareOf))];
const distinctTotals = (standards: PairStandards): string[] => [
  ...new Set(totalBlocks(standards.rows.map((row) => row.lower + row.higher))),
];

const isSelfAssociation = (plan: AssociationPlan): boolean => Object.keys(plan.association.reactants).length === 1;

/** Models whose parameters these standards can determine at all; what they cannot tell is said in words. */
function modelsThatCanBeTold(
  standards: PairStandards,
  models: ReturnType<typeof candidateModels>,
  findings: Finding[],
): ReturnType<typeof candidateModels> {
  const shares = distinctShares(standards).length;
  const totals = distinctTotals(standards).length;
  const { pair } = standards;
  const [lower, higher] = speciesOfPair(pair);
  return models.filter((plans) => {
    const mixed = plans.some((plan) => !isSelfAssociation(plan));
    const self = plans.some(isSelfAssociation);
    const name = plans.map((plan) => plan.association.name).join(' and ');
    if (mixed && shares < 3) {
      findings.push({
        code: 'cannot-tell-association',
        severity: 'caution',
        message: `${name}: three compositions between ${lower} and ${higher} are needed to fit a complex; ${shares} found`,
        hint: 'add a standard near half and half',
      });
      return false;
    }
    if (self && totals < 2) {
      findings.push({
        code: 'cannot-tell-association',
        severity: 'note',
        message: `${name}: with one total concentration self-association cannot be told from the ion's own spectrum`,
        hint: 'add standards at a second total concentration, for example diluted with the same acid to two thirds',
      });
      return false;
    }
    return standards.rows.length >= 3 + plans.length;
  });
}

/**
 * Groups for validation: preparations, else total concentrations, as `standardsOnGrid` wrote them. Where leaving a whole group out would leave one
 * total concentration and the models carry self-association, or where there is one group, shares are left out instead; that validation
 * does not see errors that a preparation shares, and says so.
 */
function withGroups(
  standards: PairStandards,
  models: ReturnType<typeof candidateModels>,
  findings: Finding[],
): PairStandards {
  const groups = new Set(standards.rows.map((row) => row.group));
  const needsTotals = models.some((plans) => plans.some(isSelfAssociation));
  const everySubsetTells = [...groups].every(
    (group) => distinctTotals({ ...standards, rows: standards.rows.filter((row) => row.group !== group) }).length > 1,
  );
  if (groups.size > 1 && (everySubsetTells || !needsTotals)) return standards;
  findings.push({
    code: 'validation-optimistic',
    severity: 'note',
    message: `${standards.pair}: ${groups.size === 1 ? 'all standards are of one preparation' : 'leaving a preparation out would leave one total concentration'}, so shares were left out in turn; errors that a preparation shares do not show`,
    hint: 'add a preparation at a further total concentration',
  });
  const shares = distinctShares(standards).sort((a, b) => a - b);
  const folds = Math.min(SHARE_FOLDS, shares.length);
  return {
    ...standards,
    rows: standards.rows.map((row) => ({
      ...row,
      group: `shares ${1 + (shares.indexOf(shareOf(row)) % folds)} of ${folds}`,
    })),
  };
}
