// What        95 % interval of a share c₁/(c₀ + c₁) of two correlated concentrations.
// Equation    the values s with (c₁ − sT)² ≤ t² var(c₁ − sT), T = c₀ + c₁.
// Why so      Exact for a ratio of normal quantities, and not symmetric when the total is poorly known or the share is near 0 or 1,
//             which the linear rule ± t·u cannot show.
// Valid for   a total that is clearly above zero; otherwise the set is unbounded and null is returned.
// Units       share 1.
// Source      Fieller, J. R. Stat. Soc. B 1954, 16, 175.

/** @param covariance row-major 2 × 2 of (lower, higher) */
export function shareInterval(
  lower: number,
  higher: number,
  covariance: ArrayLike<number>,
  quantile: number,
): [number, number] | null {
  const total = lower + higher;
  const [aa, ab, bb] = [covariance[0]!, covariance[1]!, covariance[3]!];
  const q = quantile * quantile;
  const varTotal = aa + 2 * ab + bb;
  const covHigherTotal = ab + bb;
  // (T² − q·varT) s² − 2 (c₁T − q·cov) s + (c₁² − q·var₁) = 0
  const a = total * total - q * varTotal;
  const b = higher * total - q * covHigherTotal;
  const c = higher * higher - q * bb;
  const root = b * b - a * c;
  if (!(a > 0) || !(root >= 0)) return null;
  return [(b - Math.sqrt(root)) / a, (b + Math.sqrt(root)) / a];
}
