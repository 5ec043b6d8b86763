import { stoichiometryIn } from '../electrolyte/association.ts';
import { amountsOf, newAmounts } from '../electrolyte/forwardModel.ts';
import type { PairModel } from './pairModel.ts';

/**
 * Amounts of the associations of a pair beyond its two totals, written into arrays that live as long as the kernel.
 * `amount[j]`, `byLower[j]`, `byHigher[j]` belong to association j.
 */
export interface KernelAmounts {
  readonly amount: Float64Array;
  readonly byLower: Float64Array;
  readonly byHigher: Float64Array;
  /** totals in mol/L in the cuvette */
  evaluate(lower: number, higher: number): void;
}

/** An association whose amount has a closed form. */
export interface ClosedTerm {
  /** 1/K of a one-to-one complex; 0 in the weak limit of second order */
  readonly dissociation: number;
  /** reactant number of the lower species: 0, 1 or 2 */
  readonly lowerOrder: number;
}

/** The associations of a pair; null where one of them has no closed form. */
export function closedTerms(model: PairModel): readonly ClosedTerm[] | null {
  const terms = model.associations.map((association, j) => {
    const [lower, higher] = stoichiometryIn(model.pair, association, `associations[${j}]`);
    return { constant: association.associationConstant, lower, higher };
  });
  const strong = terms.filter((term) => term.constant > 0);
  const closed =
    strong.length <= 1 &&
    terms.every((term) => term.lower + term.higher === 2 && (term.constant === 0 || term.lower === 1));
  if (!closed) return null;
  return terms.map(({ constant, lower }) => ({ dissociation: constant > 0 ? 1 / constant : 0, lowerOrder: lower }));
}

/** One-to-one complexes and weak limits of second order have a closed form; anything else goes through the general solver. */
export function kernelAmounts(model: PairModel): KernelAmounts {
  const count = model.associations.length;
  const amount = new Float64Array(count);
  const byLower = new Float64Array(count);
  const byHigher = new Float64Array(count);
  const terms = closedTerms(model);
  if (!terms) return throughTheSolver(model, amount, byLower, byHigher);
  const inverse = Float64Array.from(terms, ({ dissociation }) => dissociation);
  const lowerOrders = Uint8Array.from(terms, ({ lowerOrder }) => lowerOrder);
  const evaluate = (a: number, b: number): void => {
    for (let j = 0; j < count; j++) {
      const d = inverse[j]!;
      const order = lowerOrders[j]!;
      if (d > 0) {
        // The form of `boundConcentration`, root written as (a − b)² + (2(a + b) + 1/K)/K.
        const root = Math.sqrt(Math.max(1e-300, (a - b) * (a - b) + (2 * (a + b) + d) * d));
        const x = (2 * a * b) / (a + b + d + root);
        amount[j] = x;
        byLower[j] = (b - x) / root;
        byHigher[j] = (a - x) / root;
      } else if (order === 1) {
        amount[j] = a * b;
        byLower[j] = b;
        byHigher[j] = a;
      } else if (order === 0) {
        amount[j] = b * b;
        byLower[j] = 0;
        byHigher[j] = 2 * b;
      } else {
        amount[j] = a * a;
        byLower[j] = 2 * a;
        byHigher[j] = 0;
      }
    }
  };
  return { amount, byLower, byHigher, evaluate };
}

function throughTheSolver(
  model: PairModel,
  amount: Float64Array,
  byLower: Float64Array,
  byHigher: Float64Array,
): KernelAmounts {
  const all = amountsOf(model.pair, model.associations);
  const scratch = newAmounts(2 + amount.length);
  const evaluate = (a: number, b: number): void => {
    all(a, b, scratch);
    amount.set(scratch.amount.subarray(2));
    byLower.set(scratch.byLower.subarray(2));
    byHigher.set(scratch.byHigher.subarray(2));
  };
  return { amount, byLower, byHigher, evaluate };
}
