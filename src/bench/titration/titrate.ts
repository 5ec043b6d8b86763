// What        Titration curves of samples, standards and blanks → compositions with budgets.
// Equation    course.ts turns end points into mmol; c = mmol/aliquot·dilution; means of replicates with shared causes kept shared.
// Why so      Standardisations and blanks of the same sheet serve its samples, so that nothing is retyped.
// Valid for   samples of one pair; runs of one sample of the same electrolyte.
// Units       mol/L of the tank.
// Source      practice of redox titration; JCGM 100 for the combination.
import type { AssayNumbers, ErrorSource } from '../../assay/result.ts';
import { numbersOf, withoutValues } from '../../assay/numbers.ts';
import { speciesOfPair, type Pair, type Species } from '../../electrolyte/species.ts';
import { TankhueError, TankhueErrors, quoted } from '../../errors.ts';
import { bySeverity, stateOf, type Finding } from '../../finding.ts';
import {
  difference,
  meanOfReplicates,
  product,
  quotient,
  scaled,
  uncertaintyOf,
  type Measured,
} from '../../numerics/measured.ts';
import { celsiusFromKelvin } from '../../units.ts';
import { standardsSheetRow } from '../standardsRow.ts';
import { agreementWith, type ComparedAssay } from './agreement.ts';
import {
  backTitrationCourse,
  blankCourse,
  electronsToVanadate,
  ironCourse,
  ironThenOxidantCourse,
  oxidationCourse,
  type Course,
} from './course.ts';
import { isOxidant, type Titrant } from './couples.ts';
import { endPointsOf, measuredVolumes } from './endPoints.ts';
import { budgetOf, causeOf } from './measuredBudget.ts';
import { replicatesDisagree } from './replicates.ts';
import { sampleFindings } from './sampleFindings.ts';
import { standardise, standardsFor, type StandardisedTitrant } from './titrantStrength.ts';
import type { TitrationDocument, TitrationResult, TitrationRunResult, TitrantStrength } from './titrationResult.ts';
import type { BlankRun, SampleRun, StandardisationRun, TitrationRun } from './titrationRun.ts';

/** Concentrations one curve determines, mol/L of the tank. */
interface Determined {
  readonly run: SampleRun;
  /** the species counted directly: the lower of II/III and III/IV, the higher of IV/V */
  readonly direct: Measured | null;
  readonly total: Measured | null;
  readonly degreesOfFreedom: number;
}

/** @throws TankhueError(s) `strength-missing`, `iron-missing`, `route-unknown`, `pair-differs` */
export function titrate(runs: readonly TitrationRun[], assays: readonly ComparedAssay[] = []): TitrationDocument {
  const blanks = blankVolumes(runs.filter((run): run is BlankRun => run.task === 'blank'));
  const blankOf = (titrant: Titrant): Measured | null => blanks.volumes.get(titrant) ?? null;
  const { titrants, results } = standardise(
    runs.filter((run): run is StandardisationRun => run.task === 'standardisation'),
    blankOf,
  );
  const samples = runs.filter((run): run is SampleRun => run.task === 'sample');
  const strengths = new Strengths(titrants);
  const problems: TankhueError[] = [];
  const determined = samples.flatMap(
    (run): { run: SampleRun; determined: Determined | null; result: TitrationRunResult }[] => {
      try {
        return [determine(run, strengths, blankOf)];
      } catch (error) {
        if (!(error instanceof TankhueError)) throw error;
        problems.push(error);
        return [];
      }
    },
  );
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  const groups = new Map<string, typeof determined>();
  for (const one of determined) {
    const key = JSON.stringify([one.run.system, one.run.sample]);
    groups.set(key, [...(groups.get(key) ?? []), one]);
  }
  return {
    schema: 'tankhue/titration/1',
    titrants: strengths.records(),
    titrations: [...groups.values()].map((group) => titrationOf(group, assays)),
    runs: [...blanks.results, ...results, ...determined.map(({ result }) => result)],
  };
}

/** Stated or standardised strengths, and a record of each that was asked for. */
class Strengths {
  private readonly standardised: ReadonlyMap<Titrant, StandardisedTitrant>;
  private readonly stated = new Map<string, TitrantStrength>();

  constructor(standardised: ReadonlyMap<Titrant, StandardisedTitrant>) {
    this.standardised = standardised;
  }

  of(titrant: Titrant, stated: Measured | null, run: SampleRun): Measured {
    if (stated !== null) {
      const key = `${titrant} ${stated.value}`;
      const known = this.stated.get(key);
      this.stated.set(key, {
        titrant,
        strength: { value: stated.value, uncertainty: uncertaintyOf(stated) },
        origin: 'stated',
        runs: [...(known?.runs ?? []), run.run],
        budget: budgetOf(stated),
        findings: [],
      });
      return stated;
    }
    const found = this.standardised.get(titrant);
    if (found) return found.strength;
    throw new TankhueError(
      'strength-missing',
      `expected the strength of ${titrant} for run ${quoted(run.run)}, or its standardisation; received neither`,
      run.where,
      `fill in normality_mol_L, or titrate ${standardsFor(titrant).join(' or ')} in a run of its own with task standardisation`,
    );
  }

  records(): TitrantStrength[] {
    return [...[...this.standardised.values()].map(({ record }) => record), ...this.stated.values()];
  }
}

function blankVolumes(runs: readonly BlankRun[]): { volumes: Map<Titrant, Measured>; results: TitrationRunResult[] } {
  const volumes = new Map<Titrant, Measured[]>();
  const results = runs.map((run) => {
    const found = endPointsOf(run, blankCourse(run.titrant));
    if (found.volumes) volumes.set(run.titrant, [...(volumes.get(run.titrant) ?? []), measuredVolumes(run, found)[0]!]);
    return found.result;
  });
  return {
    volumes: new Map(
      [...volumes].map(([titrant, each]) => [
        titrant,
        meanOfReplicates(each, `repeatability:blank of ${titrant}`).mean,
      ]),
    ),
    results,
  };
}

function determine(
  run: SampleRun,
  strengths: Strengths,
  blankOf: (titrant: Titrant) => Measured | null,
): { run: SampleRun; determined: Determined | null; result: TitrationRunResult } {
  const strength = strengths.of(run.titrant, run.strength, run);
  const reagent = run.oxidant ?? run.iron;
  const reagentAmount = reagent
    ? product(strengths.of(run.oxidant?.kind ?? 'iron', reagent.strength, run), reagent.volume)
    : null;
  const course = courseOf(run, reagentAmount === null ? 0 : reagentAmount.value / strength.value);
  const found = endPointsOf(run, course);
  if (found.volumes === null) return { run, determined: null, result: found.result };
  const volumes = measuredVolumes(run, found);
  const blank = run.blank ?? blankOf(run.titrant);
  const last = volumes.length - 1;
  if (blank) volumes[last] = difference(volumes[last]!, blank);
  const toTank = (mmol: Measured): Measured => product(quotient(mmol, run.aliquot), run.dilution);
  const used = volumes.map((volume) => product(strength, volume));
  const amounts = amountsOf(run, used, reagentAmount);
  return {
    run,
    result: found.result,
    determined: {
      run,
      direct: amounts.direct && toTank(amounts.direct),
      total: amounts.total && toTank(amounts.total),
      degreesOfFreedom: found.degreesOfFreedom,
    },
  };
}

/** mmol in the beaker from mmol of electrons used up to each end point. */
function amountsOf(
  run: SampleRun,
  used: readonly Measured[],
  reagent: Measured | null,
): { direct: Measured | null; total: Measured | null } {
  const { pair } = run;
  if (used.length === 1) return pair === null ? { direct: null, total: used[0]! } : { direct: used[0]!, total: null };
  const total = difference(used[1]!, used[0]!);
  if (pair === null) return { direct: null, total };
  if (reagent === null) return { direct: used[0]!, total };
  const left = difference(reagent, used[0]!);
  if (run.iron) return { direct: left, total };
  // Electrons lacking to V(V) in all: e = eₗ·lower + eₕ·higher, eₗ = eₕ + 1.
  const lower = difference(left, scaled(total, electronsToVanadate(pair)[1]));
  return { direct: pair === 'V4/V5' ? difference(total, lower) : lower, total };
}

/** @throws TankhueError `iron-missing`, `route-unknown` */
function courseOf(run: SampleRun, reagentVolume: number): Course {
  const { titrant, pair, iron, oxidant } = run;
  const unknown = (received: string, hint: string): TankhueError =>
    new TankhueError(
      'route-unknown',
      `expected a way from ${pair ?? 'total vanadium'} to an end point; received ${received} in run ${quoted(run.run)}`,
      run.where,
      hint,
    );
  if (iron && oxidant) throw unknown('both iron(II) and oxidant added', 'leave iron_mL or oxidant_mL empty');
  if (!isOxidant(titrant)) {
    if (oxidant) return backTitrationCourse(oxidant.kind, reagentVolume);
    if (iron) throw unknown('iron(II) added and iron(II) as titrant', 'leave iron_mL empty');
    if (pair === 'V4/V5' || pair === null) return ironCourse(pair === null);
    throw unknown(
      'iron(II) as titrant, which these states do not oxidise',
      'add excess oxidant first (oxidant, oxidant_mL) and titrate it back',
    );
  }
  if (oxidant) throw unknown(`${oxidant.kind} added and ${titrant} as titrant`, 'titrate back with iron');
  if (iron) {
    if (pair === 'V4/V5' || pair === null) return ironThenOxidantCourse(titrant, reagentVolume);
    throw unknown('iron(II) added to a sample that cannot oxidise it', 'leave iron_mL empty');
  }
  if (pair === 'V2/V3' || pair === 'V3/V4') return oxidationCourse(pair, titrant);
  throw new TankhueError(
    'iron-missing',
    `expected iron(II) added before ${titrant} in run ${quoted(run.run)}; received none: V(V) gives nothing to an oxidant`,
    run.where,
    'write iron_mL and its normality, or titrate V(V) with iron',
  );
}

function titrationOf(
  group: readonly { run: SampleRun; determined: Determined | null; result: TitrationRunResult }[],
  assays: readonly ComparedAssay[],
): TitrationResult {
  const first = group[0]!.run;
  const pairs = [...new Set(group.flatMap(({ run }) => (run.pair ? [run.pair] : [])))];
  if (pairs.length > 1)
    throw new TankhueError(
      'pair-differs',
      `expected one pair for sample ${quoted(first.sample)}; received ${pairs.join(' and ')}`,
      group.find(({ run }) => run.pair === pairs[1])!.run.where,
      'give samples that hold different states names of their own',
    );
  const pair = pairs[0] ?? null;
  const good = group.flatMap(({ determined }) => (determined ? [determined] : []));
  const findings: Finding[] = runFindings(group);
  const mean = (values: readonly Measured[], what: string): Measured | null => {
    if (values.length === 0) return null;
    const { mean, birgeRatio } = meanOfReplicates(values, `repeatability:${first.sample} ${what}`);
    findings.push(...replicatesDisagree(birgeRatio, values.length, `titrations (${what})`));
    return mean;
  };
  const direct = mean(
    good.flatMap((one) => one.direct ?? []),
    directName(pair),
  );
  const total = mean(
    good.flatMap((one) => one.total ?? []),
    'total',
  );
  const freedom = Math.max(
    1,
    good.reduce((sum, { degreesOfFreedom }) => sum + degreesOfFreedom, 0),
  );
  const calculated = numbersFrom(first, pair, direct, total, (source) =>
    source.source === 'end points'
      ? freedom
      : source.source === 'repeatability'
        ? Math.max(1, good.length - 1)
        : Infinity,
  );
  const { numbers } = calculated;
  findings.push(...sampleFindings(first, pair, numbers, group.length));
  findings.sort(bySeverity);
  const state = good.length === 0 ? 'withheld' : stateOf(findings);
  const reported = state === 'withheld' ? withoutValues(numbers) : numbers;
  return {
    sample: first.sample,
    system: first.system,
    side: first.side,
    pair,
    ...reported,
    state,
    correlation: calculated.correlation,
    errorSources: calculated.sources,
    budget: calculated.budget,
    runs: group.map(({ run }) => run.run),
    findings,
    assumed: [...new Set(group.flatMap(({ run }) => run.assumed))],
    standardsRow: state === 'withheld' ? null : standardsRowOf(first, numbers),
    agreement: assays
      .filter(
        (assay) =>
          assay.sample === first.sample &&
          (first.system === '' || assay.system === '' || assay.system === first.system),
      )
      .flatMap((assay) => agreementWith(reported, assay)),
    ...(state === 'withheld' && good.length > 0 ? { unreported: numbers } : {}),
  };
}

const directName = (pair: Pair | null): string => (pair === null ? '' : pair === 'V4/V5' ? 'V5' : pair.slice(0, 2));

/** Findings of the runs, named by run where there are several; a run that gave nothing does not withhold what the others give. */
function runFindings(
  group: readonly { run: SampleRun; determined: Determined | null; result: TitrationRunResult }[],
): Finding[] {
  const anyGood = group.some(({ determined }) => determined);
  return group.flatMap(({ run, result }) =>
    result.findings.map((finding): Finding => ({
      ...finding,
      severity: finding.severity === 'withhold' && anyGood ? 'caution' : finding.severity,
      message: group.length > 1 ? `run ${run.run}: ${finding.message}` : finding.message,
    })),
  );
}

function numbersFrom(
  run: SampleRun,
  pair: Pair | null,
  direct: Measured | null,
  total: Measured | null,
  freedomOf: (source: ErrorSource) => number,
): Pick<TitrationResult, 'correlation' | 'budget'> & { numbers: AssayNumbers; sources: ErrorSource[] } {
  const quantity = (one: Measured | null) =>
    one ? { value: one.value, uncertainty: uncertaintyOf(one) } : { value: null, uncertainty: null };
  if (pair !== null && direct && total) {
    const [lower, higher] = speciesOfPair(pair);
    const other = difference(total, direct);
    const [low, high] = pair === 'V4/V5' ? [other, direct] : [direct, other];
    const sources = errorSourcesOf({ [lower]: low, [higher]: high });
    return { ...numbersOf(run.side, pair, low.value, high.value, sources, freedomOf), sources };
  }
  const species = pair === null ? null : speciesOfPair(pair)[pair === 'V4/V5' ? 1 : 0];
  return {
    numbers: {
      concentration: species ? { [species]: quantity(direct) } : {},
      totalVanadium: quantity(total),
      averageOxidationState: quantity(null),
      stateOfCharge: { ...quantity(null), interval: null },
    },
    correlation: null,
    sources: species && direct ? errorSourcesOf({ [species]: direct }) : [],
    budget: total
      ? budgetOf(total).map(({ source, uncertainty }) => ({
          source,
          stateOfCharge: 0,
          totalVanadium: uncertainty,
          averageOxidationState: 0,
        }))
      : [],
  };
}

function errorSourcesOf(concentrations: Partial<Record<Species, Measured>>): ErrorSource[] {
  const entries = Object.entries(concentrations) as [Species, Measured][];
  const keys = new Set(entries.flatMap(([, { effects }]) => [...effects.keys()]));
  return [...keys].map((key) => ({
    source: causeOf(key),
    key,
    effect: Object.fromEntries(entries.map(([species, { effects }]) => [species, effects.get(key) ?? 0])),
  }));
}

function standardsRowOf(run: SampleRun, numbers: AssayNumbers): TitrationResult['standardsRow'] {
  const entries = Object.entries(numbers.concentration) as [
    Species,
    { value: number | null; uncertainty: number | null },
  ][];
  if (entries.length < 2 || entries.some(([, { value }]) => value === null)) return null;
  return standardsSheetRow(
    {
      standard: run.sample,
      concentration: Object.fromEntries(entries.map(([species, { value }]) => [species, value!])),
      uncertainty: Math.max(...entries.map(([, { uncertainty }]) => uncertainty!)),
      preparation: run.preparation,
      temperature: run.temperature === null ? null : celsiusFromKelvin(run.temperature),
      acid: null,
    },
    run.spectrum,
  );
}
