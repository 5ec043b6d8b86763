// What        How far the farthest of a few values may lie from their mean.
// Equation    G = (n − 1)/√n · √(t²/(n − 2 + t²)), t the Student quantile at 1 − α/(2n) with n − 2 degrees of freedom.
// Why so      the closed form needs no table and holds for every n.
// Valid for   n ≥ 3 normal values, one stray on either side; fewer values are never refused (∞).
// Units       standard deviations of the values.
// Source      F. E. Grubbs, Technometrics 1969, 11, 1.
import { studentQuantile } from '../numerics/distributions.ts';

export function grubbsLimit(count: number, significance: number): number {
  if (count < 3) return Infinity;
  const t = studentQuantile(1 - significance / (2 * count), count - 2);
  return ((count - 1) / Math.sqrt(count)) * Math.sqrt((t * t) / (count - 2 + t * t));
}
