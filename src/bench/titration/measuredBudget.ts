import type { Measured } from '../../numerics/measured.ts';

/** The cause of an effect, in words: what stands before the colon of its key. */
export const causeOf = (key: string): string => key.split(':')[0]!;

/** Causes of one quantity, largest first; causes of one name are added in quadrature. */
export function budgetOf({ effects }: Measured): { source: string; uncertainty: number }[] {
  const squares = new Map<string, number>();
  for (const [key, effect] of effects) squares.set(causeOf(key), (squares.get(causeOf(key)) ?? 0) + effect ** 2);
  return [...squares]
    .map(([source, square]) => ({ source, uncertainty: Math.sqrt(square) }))
    .sort((a, b) => b.uncertainty - a.uncertainty);
}
