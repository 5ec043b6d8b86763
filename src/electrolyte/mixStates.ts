// What        What is left when vanadium of any oxidation states meets in one vessel, the heat set free and the acid used.
// Equation    V²⁺ + VO₂⁺ + 2 H⁺ → V³⁺ + VO²⁺ + H₂O; V²⁺ + VO²⁺ + 2 H⁺ → 2 V³⁺ + H₂O; V³⁺ + VO₂⁺ → 2 VO²⁺.
//             Vanadium N and electrons Σ i·nᵢ are kept, so with ν = Σ i·nᵢ/N only the two states next to ν remain.
// Why so      The constants (10¹⁰ … 10²¹) leave less than 0.01 % of a third state: complete reaction is exact to the digits anyone measures,
//             and taking the end from N and ν instead of from limiting reactants keeps both to rounding and lets slightly negative
//             (measured) amounts through unchanged. Extents are signed for the same reason.
// Valid for   all reactants in one stirred solution with acid to spare; no air. ν outside 2 … 5 extrapolates the outer pair and stays visible.
// Units       mol, kJ, L, K. Heat is positive when it is set free; heat of dilution and of mixing acids is not in it.
// Source      formation enthalpies at 25 °C, kJ/mol: V²⁺ −226, V³⁺ −259, VO²⁺ −486.6, VO₂⁺ −649.8, H₂O −285.8 (NBS tables, from memory).
import { TankhueError } from '../errors.ts';
import { PAIRS, SPECIES, oxidationNumber, speciesOfPair, type Pair, type Species } from './species.ts';

/** mol of each oxidation state */
export type VanadiumAmounts = Readonly<Record<Species, number>>;

/** One of the three reactions between states that cannot coexist. */
export interface StateReaction {
  readonly equation: string;
  /** mol of reaction as written; negative where a measured amount was below zero */
  readonly extent: number;
  /** kJ set free */
  readonly heat: number;
}

export interface MixedStates {
  /** mol; the two states of `pair`, zero for the others */
  readonly amounts: VanadiumAmounts;
  readonly pair: Pair;
  readonly averageOxidationState: number;
  /** mol of H⁺ used up; as many half moles of water are formed */
  readonly protonsConsumed: number;
  /** kJ set free by the reactions together */
  readonly heat: number;
  /** those that went forward or, on measured amounts below zero, back; strongest first */
  readonly reactions: readonly StateReaction[];
}

/** kJ/mol at 25 °C, from memory of the NBS tables. */
const FORMATION_ENTHALPY = { V2: -226, V3: -259, V4: -486.6, V5: -649.8, water: -285.8 } as const;
/** Oxygen atoms an ion carries: what it gives up becomes water and takes two protons each. */
const OXYGENS: VanadiumAmounts = { V2: 0, V3: 0, V4: 1, V5: 2 };

const REACTIONS: Readonly<Record<'V2+V5' | 'V2+V4' | 'V3+V5', { equation: string; change: Partial<VanadiumAmounts> }>> =
  {
    'V2+V5': { equation: 'V(II) + V(V) → V(III) + V(IV)', change: { V2: -1, V5: -1, V3: 1, V4: 1 } },
    'V2+V4': { equation: 'V(II) + V(IV) → 2 V(III)', change: { V2: -1, V4: -1, V3: 2 } },
    'V3+V5': { equation: 'V(III) + V(V) → 2 V(IV)', change: { V3: -1, V5: -1, V4: 2 } },
  };

/** Volumetric heat capacity of vanadium electrolyte, kJ/(L·K): 1.354 kg/L × 3.2 kJ/(kg·K), from memory. */
const HEAT_CAPACITY = 4.33;

/** Warming of `volume` litres by `heat` kJ, K, with nothing lost to the vessel. */
export const warmingOf = (heat: number, volume: number): number => heat / (volume * HEAT_CAPACITY);

/** The pair next to a mean oxidation state; the outer pairs reach beyond 2 and 5. */
export const pairAround = (averageOxidationState: number): Pair =>
  averageOxidationState < 3 ? PAIRS[0] : averageOxidationState < 4 ? PAIRS[1] : PAIRS[2];

/**
 * @param amounts mol of each state before they react
 * @throws TankhueError `not-finite`, `no-vanadium`
 */
export function mixStates(amounts: VanadiumAmounts): MixedStates {
  for (const species of SPECIES)
    if (!Number.isFinite(amounts[species]))
      throw new TankhueError(
        'not-finite',
        `expected a finite amount in mol; received ${amounts[species]}`,
        `amounts.${species}`,
        'write 0 for a state that is not there',
      );
  const total = SPECIES.reduce((sum, species) => sum + amounts[species], 0);
  if (!(total > 0))
    throw new TankhueError(
      'no-vanadium',
      `expected vanadium in the mixture; received ${total} mol`,
      'amounts',
      'check the volumes and concentrations of what is mixed',
    );
  const averageOxidationState =
    SPECIES.reduce((sum, species) => sum + oxidationNumber(species) * amounts[species], 0) / total;
  const pair = pairAround(averageOxidationState);
  const [lower, upper] = speciesOfPair(pair);
  const upperAmount = (averageOxidationState - oxidationNumber(lower)) * total;
  const end = { V2: 0, V3: 0, V4: 0, V5: 0, [lower]: total - upperAmount, [upper]: upperAmount };

  // Two balances leave two free extents; the strongest reaction is taken as far as its reactants go, the other two close V(II) and V(V).
  const first = Math.max(0, Math.min(amounts.V2 - end.V2, amounts.V5 - end.V5));
  const extents = { 'V2+V5': first, 'V2+V4': amounts.V2 - first - end.V2, 'V3+V5': amounts.V5 - first - end.V5 };
  const negligible = 1e-12 * total;
  const reactions = (Object.keys(REACTIONS) as (keyof typeof REACTIONS)[])
    .map((name) => ({
      equation: REACTIONS[name].equation,
      extent: extents[name],
      heat: extents[name] * heatOfChange(REACTIONS[name].change),
    }))
    .filter(({ extent }) => Math.abs(extent) > negligible);
  const change = Object.fromEntries(SPECIES.map((species) => [species, end[species] - amounts[species]]));
  return {
    amounts: end,
    pair,
    averageOxidationState,
    protonsConsumed: 2 * waterFormed(change),
    heat: heatOfChange(change),
    reactions,
  };
}

const waterFormed = (change: Partial<VanadiumAmounts>): number =>
  -SPECIES.reduce((sum, species) => sum + OXYGENS[species] * (change[species] ?? 0), 0);

/** kJ set free by a change of the amounts, water included, protons at zero. */
const heatOfChange = (change: Partial<VanadiumAmounts>): number =>
  -SPECIES.reduce((sum, species) => sum + FORMATION_ENTHALPY[species] * (change[species] ?? 0), 0) -
  FORMATION_ENTHALPY.water * waterFormed(change);
