// What        Regularised incomplete gamma function P(a, x), Q = 1 − P, and incomplete beta function I_x(a, b), 1 − I.
// Equation    series for P below x = a + 1 and Lentz's continued fraction for Q above; continued fraction for I below
//             x = (a+1)/(a+b+2) and for 1 − I above.
// Why so      Each side is computed where it is the small one, so that tail probabilities keep their digits. The factor in front comes from
//             the saddle point form, so that large degrees of freedom keep theirs.
// Valid for   a, b > 0, 0 ≤ x. Steps grow with √a; tested to 1e8 degrees of freedom.
// Units       none.
// Source      M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 6.5.29, 6.5.31; the fraction of I is the even part of 26.5.8
//             as in A. R. DiDonato, A. H. Morris, ACM Trans. Math. Softw. 1992, 18, 360.
import { binomialDensity, poissonDensity } from './saddlePoint.ts';

/** Both sides of a distribution; they add up to 1 and the smaller one has its own digits. */
export interface Tails {
  readonly below: number;
  readonly above: number;
}

const PRECISION = 1e-16;
const TINY = 1e-300;

export function incompleteGamma(a: number, x: number): Tails {
  if (x <= 0) return { below: 0, above: 1 };
  if (x === Infinity) return { below: 1, above: 0 };
  const front = poissonDensity(a, x);
  if (x < a + 1) {
    let term = 1;
    let sum = 1;
    for (let n = 1; term > sum * PRECISION; n++) {
      term *= x / (a + n);
      sum += term;
    }
    const below = front * sum;
    return { below, above: 1 - below };
  }
  // Q = x^a e^−x / Γ(a) · 1/(x + 1 − a − 1(1−a)/(x + 3 − a − …))
  const above =
    front *
    a *
    lentz(
      x + 1 - a,
      (n) => n * (a - n),
      (n) => x + 2 * n + 1 - a,
      100 + 20 * Math.sqrt(a),
    );
  return { below: 1 - above, above };
}

/** @param complement 1 − x, passed because it may be known better than the difference */
export function incompleteBeta(a: number, b: number, x: number, complement: number): Tails {
  if (x <= 0) return { below: 0, above: 1 };
  if (complement <= 0) return { below: 1, above: 0 };
  if (x > (a + 1) / (a + b + 2)) {
    const { below, above } = incompleteBeta(b, a, complement, x);
    return { below: above, above: below };
  }
  // λ + 1 + … instead of plain powers of x: next to x = 1 the complement carries the digits.
  const excess = a * complement - b * x;
  const fraction = lentz(
    (a * (excess + 1)) / (a + 1),
    (n) => ((a + n - 1) * (a + b + n - 1) * n * (b - n) * x * x) / (a + 2 * n - 1) ** 2,
    (n) => n + (n * (b - n) * x) / (a + 2 * n - 1) + ((a + n) * (excess + 1 + n * (1 + complement))) / (a + 2 * n + 1),
    100 + 20 * Math.sqrt(Math.max(a, b)),
  );
  // x^a (1−x)^b / B(a, b)
  const front = (binomialDensity(a, b, x, complement) * a * b) / (a + b);
  const below = front * fraction;
  return { below, above: 1 - below };
}

/** 1/(first + top(1)/(bottom(1) + top(2)/(bottom(2) + …))) */
function lentz(first: number, top: (n: number) => number, bottom: (n: number) => number, limit: number): number {
  let f = first || TINY;
  let c = f;
  let d = 0;
  for (let n = 1; n <= limit; n++) {
    d = bottom(n) + top(n) * d || TINY;
    c = bottom(n) + top(n) / c || TINY;
    d = 1 / d;
    const step = c * d;
    f *= step;
    if (Math.abs(step - 1) < 2 * PRECISION) break;
  }
  return 1 / f;
}
