import {
  oxidationNumber,
  speciesOfPair,
  stateOfChargeFromOxidationState,
  type Pair,
  type Side,
} from '../electrolyte/species.ts';
import { shareInterval } from '../estimation/interval.ts';
import { studentQuantile } from '../numerics/distributions.ts';
import type { AssayNumbers, BudgetLine, ErrorSource } from './result.ts';

/** Row-major 2 × 2 covariance of the two concentrations of a pair from its error sources, mol²/L². */
export function covarianceOf(pair: Pair, sources: readonly ErrorSource[]): [number, number, number, number] {
  const [lower, higher] = speciesOfPair(pair);
  let aa = 0;
  let ab = 0;
  let bb = 0;
  for (const { effect } of sources) {
    const a = effect[lower] ?? 0;
    const b = effect[higher] ?? 0;
    aa += a * a;
    ab += a * b;
    bb += b * b;
  }
  return [aa, ab, ab, bb];
}

/** Effect of one source on the mean oxidation state and on the total (mol/L). */
function effectOn(
  pair: Pair,
  lowerValue: number,
  higherValue: number,
  source: ErrorSource,
): { state: number; total: number } {
  const [lower, higher] = speciesOfPair(pair);
  const a = source.effect[lower] ?? 0;
  const b = source.effect[higher] ?? 0;
  const total = lowerValue + higherValue;
  return { state: (lowerValue * b - higherValue * a) / total ** 2, total: a + b };
}

/**
 * All numbers of an assay from the concentrations (mol/L of the tank) and their error sources.
 * The interval of the state of charge is Fieller's with Student's t at Welch-Satterthwaite degrees of freedom; `freedomOf` says how many
 * a source has (Infinity where it is known from experience).
 */
export function numbersOf(
  side: Side,
  pair: Pair,
  lowerValue: number,
  higherValue: number,
  sources: readonly ErrorSource[],
  freedomOf: (source: ErrorSource) => number,
): { numbers: AssayNumbers; correlation: number; budget: BudgetLine[]; degreesOfFreedom: number } {
  const [lower, higher] = speciesOfPair(pair);
  const covariance = covarianceOf(pair, sources);
  const [aa, ab, , bb] = covariance;
  const effects = sources.map((source) => ({ source, ...effectOn(pair, lowerValue, higherValue, source) }));
  const stateVariance = effects.reduce((sum, { state }) => sum + state * state, 0);
  const degreesOfFreedom =
    stateVariance ** 2 / effects.reduce((sum, { source, state }) => sum + state ** 4 / freedomOf(source), 0);
  const total = lowerValue + higherValue;
  const averageOxidationState = oxidationNumber(lower) + higherValue / total;
  const stateOfCharge = stateOfChargeFromOxidationState(side, averageOxidationState);
  const quantile = studentQuantile(0.975, Math.min(1e6, Math.max(1, degreesOfFreedom)));
  const share = shareInterval(lowerValue, higherValue, covariance, quantile);
  const ends = share
    ?.map((s) => stateOfChargeFromOxidationState(side, oxidationNumber(lower) + s))
    .sort((p, q) => p - q);
  return {
    numbers: {
      concentration: {
        [lower]: { value: lowerValue, uncertainty: Math.sqrt(aa) },
        [higher]: { value: higherValue, uncertainty: Math.sqrt(bb) },
      },
      totalVanadium: { value: total, uncertainty: Math.sqrt(Math.max(0, aa + 2 * ab + bb)) },
      averageOxidationState: { value: averageOxidationState, uncertainty: Math.sqrt(stateVariance) },
      stateOfCharge: Number.isNaN(stateOfCharge)
        ? { value: null, uncertainty: null, interval: null }
        : {
            value: stateOfCharge,
            uncertainty: Math.sqrt(stateVariance),
            interval: ends ? [ends[0]!, ends[1]!] : null,
          },
    },
    correlation: ab / Math.sqrt(aa * bb),
    budget: budgetOf(effects, Number.isNaN(stateOfCharge)),
    degreesOfFreedom,
  };
}

/** Lines by source, largest share of the state of charge first. */
function budgetOf(
  effects: readonly { source: ErrorSource; state: number; total: number }[],
  composite: boolean,
): BudgetLine[] {
  const lines = new Map<string, { state: number; total: number }>();
  for (const { source, state, total } of effects) {
    const line = lines.get(source.source) ?? { state: 0, total: 0 };
    lines.set(source.source, { state: line.state + state * state, total: line.total + total * total });
  }
  return [...lines]
    .map(([source, line]) => ({
      source,
      stateOfCharge: composite ? 0 : Math.sqrt(line.state),
      totalVanadium: Math.sqrt(line.total),
      averageOxidationState: Math.sqrt(line.state),
    }))
    .sort((a, b) => b.averageOxidationState - a.averageOxidationState);
}

/** The same quantities without their values, for a result that is withheld. */
export function withoutValues(numbers: AssayNumbers): AssayNumbers {
  const empty = { value: null, uncertainty: null };
  return {
    concentration: Object.fromEntries(Object.keys(numbers.concentration).map((species) => [species, { ...empty }])),
    totalVanadium: { ...empty },
    averageOxidationState: { ...empty },
    stateOfCharge: { ...empty, interval: null },
  };
}
