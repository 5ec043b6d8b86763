// What        The ways of titrating vanadium that tankhue evaluates: which couples the electrode follows one after the other, how many
//             steps there are, and what the end points say.
// Equation    N·v counts electrons, N′·v′ those of the reagent added at the start; differences of end points count vanadium:
//             II/III and III/IV with oxidant: lower state N v₁, total N(v₂ − v₁). IV/V after iron(II): V(V) = N′v′ − N v₁, total N(v₂ − v₁).
//             Excess oxidant, back with iron(II): electrons lacking to V(V) e = N′v′ − N v₁, total N(v₂ − v₁).
//             V(V) straight with iron(II): V(V) = N v₁ (the total, where all of it was oxidised before).
// Why so      One table of branches serves Gran's functions, the joint fit and the check of the label.
// Valid for   samples that hold one pair; every step one electron per vanadium.
// Units       mL of titrant, mmol in the beaker.
// Source      stoichiometry; the routes are common practice.
import type { Pair } from '../../electrolyte/species.ts';
import { COUPLES, isOxidant, type Couple, type Oxidant, type Titrant } from './couples.ts';

/** Stretch of the curve on which one couple sets the potential. All in mL of titrant, from the end points `v`. */
export interface Branch {
  readonly couple: Couple;
  readonly from: (v: readonly number[]) => number;
  /** end of the step; null where titrant in excess sets the potential */
  readonly to: ((v: readonly number[]) => number) | null;
  /** product of this step that is there at its start, as mL of titrant */
  readonly product: (v: readonly number[]) => number;
}

export interface Course {
  readonly name: string;
  /** +1 oxidation (potential rises), −1 reduction */
  readonly direction: 1 | -1;
  /** what happens up to each end point that is needed */
  readonly steps: readonly string[];
  /** a further end point the curve may show, from those needed */
  readonly further: ((v: readonly number[]) => number) | null;
  readonly branches: readonly Branch[];
  /** V, of each stretch between end points in turn, the titrant's last: what the label promises */
  readonly levels: readonly number[];
  /** whether the product at the start is unknown and has to be fitted */
  readonly startUnknown: boolean;
}

const zero = (): number => 0;
const first = (v: readonly number[]): number => v[0]!;
const second = (v: readonly number[]): number => v[1]!;

const step = (
  couple: Couple,
  from: Branch['from'],
  to: NonNullable<Branch['to']>,
  product = zero as Branch['product'],
) => ({
  couple,
  from,
  to,
  product,
});

/** Titrant in excess after the last step, where the electrode follows it. */
const excess = (titrant: Titrant, from: Branch['from']): Branch[] =>
  COUPLES[titrant].reversible ? [{ couple: COUPLES[titrant], from, to: null, product: zero }] : [];

const levelsOf = (...couples: Couple[]): number[] => couples.map(({ formalPotential }) => formalPotential);

/** II/III or III/IV with an oxidant: two steps from the sample's own pair. */
export function oxidationCourse(pair: 'V2/V3' | 'V3/V4', titrant: Oxidant): Course {
  const initial = (v: readonly number[]): number => second(v) - 2 * first(v);
  const third = (v: readonly number[]): number => 2 * second(v) - first(v);
  const [one, two, three] = [COUPLES['V2/V3'], COUPLES['V3/V4'], COUPLES['V4/V5']];
  if (pair === 'V2/V3')
    return {
      name: 'II/III with oxidant',
      direction: 1,
      steps: [one.name, two.name],
      further: third,
      branches: [
        step(one, zero, first, initial),
        step(two, first, second),
        step(three, second, third),
        ...excess(titrant, third),
      ],
      levels: levelsOf(one, two, three),
      startUnknown: false,
    };
  return {
    name: 'III/IV with oxidant',
    direction: 1,
    steps: [two.name, three.name],
    further: null,
    branches: [step(two, zero, first, initial), step(three, first, second), ...excess(titrant, second)],
    levels: levelsOf(two, three, COUPLES[titrant]),
    startUnknown: false,
  };
}

/** IV/V after iron(II): its excess first, then all vanadium. @param reagent mL of titrant the iron(II) added could use up */
export function ironThenOxidantCourse(titrant: Oxidant, reagent: number): Course {
  const { iron } = COUPLES;
  const last = COUPLES['V4/V5'];
  return {
    name: 'iron(II) added, then oxidant',
    direction: 1,
    steps: [iron.name, last.name],
    further: null,
    branches: [
      step(iron, zero, first, (v) => reagent - first(v)),
      step(last, first, second),
      ...excess(titrant, second),
    ],
    levels: levelsOf(iron, last, COUPLES[titrant]),
    startUnknown: false,
  };
}

/** Excess oxidant added, back with iron(II). @param reagent mL of titrant the oxidant added could use up */
export function backTitrationCourse(oxidant: Oxidant, reagent: number): Course {
  const couple = COUPLES[oxidant];
  const last = COUPLES['V4/V5'];
  return {
    name: 'oxidant added, back with iron(II)',
    direction: -1,
    steps: [`excess ${couple.name.split(' → ')[1]}`, 'V(V) → V(IV)'],
    further: null,
    branches: [
      ...(couple.reversible ? [step(couple, zero, first, (v) => reagent - first(v))] : []),
      step(last, first, second),
      ...excess('iron', second),
    ],
    levels: levelsOf(couple, last, COUPLES.iron),
    startUnknown: false,
  };
}

/** V(V) straight with iron(II). @param complete whether all vanadium was oxidised to V(V) before */
export function ironCourse(complete: boolean): Course {
  return {
    name: 'V(V) with iron(II)',
    direction: -1,
    steps: ['V(V) → V(IV)'],
    further: null,
    branches: [step(COUPLES['V4/V5'], zero, first), ...excess('iron', first)],
    levels: levelsOf(COUPLES['V4/V5'], COUPLES.iron),
    startUnknown: !complete,
  };
}

export const PRIMARY_STANDARDS = ['sodium-oxalate', 'iron-ammonium-sulfate', 'potassium-dichromate'] as const;
export type PrimaryStandard = (typeof PRIMARY_STANDARDS)[number];

/** A weighed standard against the titrant whose strength is wanted. */
export function standardisationCourse(standard: PrimaryStandard, titrant: Titrant): Course {
  const before = { 'sodium-oxalate': null, 'iron-ammonium-sulfate': COUPLES.iron, 'potassium-dichromate': null }[
    standard
  ];
  return {
    name: `${standard.replaceAll('-', ' ')} with ${titrant}`,
    direction: isOxidant(titrant) ? 1 : -1,
    steps: [standard.replaceAll('-', ' ')],
    further: null,
    branches: [...(before ? [step(before, zero, first)] : []), ...excess(titrant, first)],
    levels: [],
    startUnknown: false,
  };
}

/** Reagents alone. */
export function blankCourse(titrant: Titrant): Course {
  return {
    name: 'blank',
    direction: isOxidant(titrant) ? 1 : -1,
    steps: ['reagents'],
    further: null,
    branches: [],
    levels: [],
    startUnknown: false,
  };
}

/** Electrons per vanadium from a state of the pair to V(V), lower and higher. */
export const electronsToVanadate = (pair: Pair): readonly [number, number] =>
  pair === 'V2/V3' ? [3, 2] : pair === 'V3/V4' ? [2, 1] : [1, 0];
