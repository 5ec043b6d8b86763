// What        The label of a bottle: its composition after what cannot coexist has reacted, with uncertainty and budget.
// Equation    vanadium N = Σcᵢ and electrons Σ i·cᵢ are kept; of the pair (l, l+1) around ν: higher = Σ i·cᵢ − l·N, lower = N − higher.
// Why so      both balances are linear in the portions, so every cause of error is carried through the reaction without approximation.
// Valid for   complete reaction (mixStates.ts).
// Units       mol/L.
// Source      JCGM 100; balances of vanadium and electrons.
import { numbersOf } from '../../assay/numbers.ts';
import type { ErrorSource } from '../../assay/result.ts';
import { pairAround } from '../../electrolyte/mixStates.ts';
import { oxidationNumber, PAIR_OF_SIDE, SIDES, SPECIES, speciesOfPair, type Side } from '../../electrolyte/species.ts';
import { difference, exactly, scaled, sumOf, type Measured } from '../../numerics/measured.ts';
import { causeOf } from '../titration/measuredBudget.ts';
import { totalOf, type MeasuredComposition } from './stock.ts';
import type { Mixture } from './mixResult.ts';

/** The composition at rest: two neighbours, the others exactly zero. */
export function reacted(concentration: MeasuredComposition): MeasuredComposition {
  const total = totalOf(concentration);
  const electrons = sumOf(...SPECIES.map((species) => scaled(concentration[species], oxidationNumber(species))));
  const [lower, higher] = speciesOfPair(pairAround(electrons.value / total.value));
  const upper = difference(electrons, scaled(total, oxidationNumber(lower)));
  const none = exactly(0);
  return { V2: none, V3: none, V4: none, V5: none, [lower]: difference(total, upper), [higher]: upper };
}

export type Label = Pick<
  Mixture,
  | 'side'
  | 'pair'
  | 'concentration'
  | 'totalVanadium'
  | 'averageOxidationState'
  | 'stateOfCharge'
  | 'correlation'
  | 'budget'
>;

/** Side whose own pair it is; a III/IV mixture is a composite. */
export function labelOf(atRest: MeasuredComposition): Label {
  const total = totalOf(atRest).value;
  const nu = SPECIES.reduce((sum, species) => sum + oxidationNumber(species) * atRest[species].value, 0) / total;
  const pair = pairAround(nu);
  const side: Side = SIDES.find((one) => PAIR_OF_SIDE[one] === pair)!;
  const [lower, higher] = speciesOfPair(pair);
  const low: Measured = atRest[lower];
  const high: Measured = atRest[higher];
  const sources: ErrorSource[] = [...new Set([...low.effects.keys(), ...high.effects.keys()])].map((key) => ({
    source: causeOf(key),
    key,
    effect: { [lower]: low.effects.get(key) ?? 0, [higher]: high.effects.get(key) ?? 0 },
  }));
  const { numbers, correlation, budget } = numbersOf(side, pair, low.value, high.value, sources, () => Infinity);
  return { side, pair, ...numbers, correlation: Number.isFinite(correlation) ? correlation : null, budget };
}
