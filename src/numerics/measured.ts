// What        A measured value that remembers which independent causes of error it carries, and arithmetic that keeps them.
// Equation    first order: f(x, y) carries ∂f/∂x·eₖ(x) + ∂f/∂y·eₖ(y) of every cause k; u² = Σ eₖ², covariance Σ eₖ(x)eₖ(y).
// Why so      Whatever two results share (titrant, pipette, weighing) stays shared without a correlation being typed in, and the budget is
//             the same sum taken apart.
// Valid for   relative errors small enough for straight lines (a few per cent).
// Units       those of the value.
// Source      JCGM 100:2008, 5.1.2 and F.1.2.3.

export interface Measured {
  readonly value: number;
  /** effect of one standard deviation of each cause, by its key */
  readonly effects: ReadonlyMap<string, number>;
}

/** A value with one cause of error; none where the uncertainty is 0. */
export const measured = (value: number, uncertainty: number, key: string): Measured => ({
  value,
  effects: new Map(uncertainty === 0 ? [] : [[key, uncertainty]]),
});

export const exactly = (value: number): Measured => ({ value, effects: new Map() });

/** Σ factorᵢ·termᵢ with the value given: the first-order result of any function with these partial derivatives. */
function linear(value: number, terms: readonly (readonly [Measured, number])[]): Measured {
  const effects = new Map<string, number>();
  for (const [term, factor] of terms)
    for (const [key, effect] of term.effects) effects.set(key, (effects.get(key) ?? 0) + factor * effect);
  return { value, effects };
}

export const sumOf = (...terms: readonly Measured[]): Measured =>
  linear(
    terms.reduce((sum, { value }) => sum + value, 0),
    terms.map((term) => [term, 1] as const),
  );

export const difference = (a: Measured, b: Measured): Measured =>
  linear(a.value - b.value, [
    [a, 1],
    [b, -1],
  ]);

export const scaled = (a: Measured, factor: number): Measured => linear(a.value * factor, [[a, factor]]);

export const product = (a: Measured, b: Measured): Measured =>
  linear(a.value * b.value, [
    [a, b.value],
    [b, a.value],
  ]);

export const quotient = (a: Measured, b: Measured): Measured =>
  linear(a.value / b.value, [
    [a, 1 / b.value],
    [b, -a.value / b.value ** 2],
  ]);

export const meanOf = (values: readonly Measured[]): Measured => scaled(sumOf(...values), 1 / values.length);

export const uncertaintyOf = ({ effects }: Measured): number => Math.hypot(...effects.values());

/**
 * Mean of replicates. Where they scatter more than their own errors allow, the excess enters as a cause of its own;
 * errors they share cancel in the scatter and stay in the mean.
 * @returns the mean, and observed over expected scatter (Birge's ratio; NaN for one value)
 */
export function meanOfReplicates(values: readonly Measured[], key: string): { mean: Measured; birgeRatio: number } {
  const mean = meanOf(values);
  if (values.length < 2) return { mean, birgeRatio: NaN };
  const departures = values.map((value) => difference(value, mean));
  const expected = departures.reduce((sum, departure) => sum + uncertaintyOf(departure) ** 2, 0);
  const observed = departures.reduce((sum, { value }) => sum + value ** 2, 0);
  const excess = Math.max(0, observed - expected) / (values.length - 1) / values.length;
  return { mean: sumOf(mean, measured(0, Math.sqrt(excess), key)), birgeRatio: Math.sqrt(observed / expected) };
}
