// What        Strength of a titrant from a weighed primary standard.
// Equation    N = 1000·z·m·P/(M·(v − v_blank)), m g, M g/mol, v mL; mean of the runs, with the scatter they show beyond their own errors.
// Why so      weighing, purity and burette stay causes of their own, so that the budget of a sample shows what the strength is worth.
// Valid for   standards dried as their label says; oxalate titrated warm (above 60 °C), iron and dichromate in 1-2 mol/L acid.
// Units       mol of electrons per litre.
// Source      stoichiometry; budget after Eurachem/CITAC CG 4 (QUAM) example A2, whose figures test it.
import { bySeverity, type Finding } from '../../finding.ts';
import {
  meanOfReplicates,
  measured,
  product,
  quotient,
  scaled,
  difference,
  uncertaintyOf,
  type Measured,
} from '../../numerics/measured.ts';
import { MOLAR_MASS, RELATIVE_MASS_UNCERTAINTY } from '../molarMass.ts';
import { PRIMARY_STANDARDS, standardisationCourse, type PrimaryStandard } from './course.ts';
import { TITRANTS, type Titrant } from './couples.ts';
import { endPointsOf, measuredVolumes } from './endPoints.ts';
import { budgetOf } from './measuredBudget.ts';
import { replicatesDisagree } from './replicates.ts';
import type { TitrantStrength, TitrationRunResult } from './titrationResult.ts';
import type { StandardisationRun } from './titrationRun.ts';

/** Electrons each formula unit gives or takes, and its molar mass. */
const STANDARD: Readonly<
  Record<PrimaryStandard, { electrons: number; molarMass: number; against: readonly Titrant[] }>
> = {
  'sodium-oxalate': { electrons: 2, molarMass: MOLAR_MASS.sodiumOxalate, against: ['permanganate', 'cerium'] },
  'iron-ammonium-sulfate': {
    electrons: 1,
    molarMass: MOLAR_MASS.ironAmmoniumSulfate,
    against: ['permanganate', 'cerium', 'dichromate'],
  },
  'potassium-dichromate': { electrons: 6, molarMass: MOLAR_MASS.potassiumDichromate, against: ['iron'] },
};

export const standardsFor = (titrant: Titrant): PrimaryStandard[] =>
  PRIMARY_STANDARDS.filter((standard) => STANDARD[standard].against.includes(titrant));

/** @param volume mL used up, blank taken off */
export function strengthFromStandard(
  standard: { electrons: number; molarMass: Measured; mass: Measured; purity: Measured },
  volume: Measured,
): Measured {
  return scaled(
    quotient(product(standard.mass, standard.purity), product(standard.molarMass, volume)),
    1000 * standard.electrons,
  );
}

export interface StandardisedTitrant {
  readonly strength: Measured;
  readonly record: TitrantStrength;
}

/** Strengths of all titrants that have standardisation runs, and what each curve gave. */
export function standardise(
  runs: readonly StandardisationRun[],
  blankOf: (titrant: Titrant) => Measured | null,
): { titrants: Map<Titrant, StandardisedTitrant>; results: TitrationRunResult[] } {
  const results: TitrationRunResult[] = [];
  const titrants = new Map<Titrant, StandardisedTitrant>();
  for (const titrant of TITRANTS) {
    const strengths: { run: string; strength: Measured }[] = [];
    const findings: Finding[] = [];
    for (const run of runs.filter((one) => one.titrant === titrant)) {
      const found = endPointsOf(run, standardisationCourse(run.standard, titrant));
      results.push(found.result);
      findings.push(...found.result.findings.filter(({ severity }) => severity !== 'note'));
      if (found.volumes === null) continue;
      const { electrons, molarMass } = STANDARD[run.standard];
      const [volume] = measuredVolumes(run, found);
      strengths.push({
        run: run.run,
        strength: strengthFromStandard(
          {
            electrons,
            molarMass: measured(molarMass, RELATIVE_MASS_UNCERTAINTY * molarMass, `molar mass:${run.standard}`),
            mass: run.mass,
            purity: run.purity,
          },
          difference(volume!, run.blank ?? blankOf(titrant) ?? measured(0, 0, '')),
        ),
      });
    }
    if (strengths.length === 0) continue;
    const { mean, birgeRatio } = meanOfReplicates(
      strengths.map(({ strength }) => strength),
      `repeatability:strength of ${titrant}`,
    );
    findings.push(...replicatesDisagree(birgeRatio, strengths.length, `standardisations of ${titrant}`));
    titrants.set(titrant, {
      strength: mean,
      record: {
        titrant,
        strength: { value: mean.value, uncertainty: uncertaintyOf(mean) },
        origin: 'standardised',
        runs: strengths.map(({ run }) => run),
        budget: budgetOf(mean),
        findings: findings.sort(bySeverity),
      },
    });
  }
  return { titrants, results };
}
