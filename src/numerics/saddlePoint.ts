// What        Densities of the Poisson and the binomial law for real arguments, to nearly full precision.
// Equation    poisson(x; m) = m^x e^−m / Γ(x+1); binomial(x, y; p) = Γ(x+y+1)/(Γ(x+1)Γ(y+1)) p^x (1−p)^y.
//             Written as √(n/(2πxy)) exp(δ(n) − δ(x) − δ(y) − D(x, np) − D(y, nq)), δ = error of Stirling's formula,
//             D(x, m) = x ln(x/m) + m − x, and np − x = yp − xq.
// Why so      Differences of log Γ lose log10(degrees of freedom) and more digits; here the large terms never arise.
// Valid for   x, y > 0.
// Units       none.
// Source      C. Loader, Fast and accurate computation of binomial probabilities, 2000; series of Stirling: M. Abramowitz,
//             I. A. Stegun, Handbook of Mathematical Functions, 6.1.40. The recurrence of δ for small arguments is algebra.

/** ln Γ(z+1) − (z + ½) ln z + z − ½ ln 2π. */
export function stirlingError(z: number): number {
  let sum = 0;
  // δ(z) − δ(z+1) = (z + ½) ln(1 + 1/z) − 1, until the asymptotic series holds all digits.
  while (z < 16) {
    sum += (z + 0.5) * Math.log1p(1 / z) - 1;
    z += 1;
  }
  const w = 1 / (z * z);
  return sum + (1 / 12 - w * (1 / 360 - w * (1 / 1260 - w * (1 / 1680 - w * (1 / 1188 - (w * 691) / 360360))))) / z;
}

/** @param excess m − x, passed because it may be known better than the difference */
export function deviance(x: number, m: number, excess: number): number {
  if (Math.abs(excess) >= 0.1 * (x + m)) return x * Math.log(x / m) + excess;
  const v = -excess / (x + m);
  let sum = -excess * v;
  let term = 2 * x * v;
  for (let j = 1; j < 1000; j++) {
    term *= v * v;
    const next = sum + term / (2 * j + 1);
    if (next === sum) break;
    sum = next;
  }
  return sum;
}

export const poissonDensity = (x: number, m: number): number =>
  Math.exp(-stirlingError(x) - deviance(x, m, m - x)) / Math.sqrt(2 * Math.PI * x);

/** @param q 1 − p, passed because it may be known better than the difference */
export function binomialDensity(x: number, y: number, p: number, q: number): number {
  const n = x + y;
  const excess = y * p - x * q;
  const exponent =
    stirlingError(n) - stirlingError(x) - stirlingError(y) - deviance(x, n * p, excess) - deviance(y, n * q, -excess);
  return Math.exp(exponent) * Math.sqrt(n / (2 * Math.PI * x * y));
}
