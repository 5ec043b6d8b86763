// What        Values between points: on straight pieces, and on a smooth curve that rises and falls only where the points do.
// Equation    cubic Hermite pieces; slopes are the three-point means, cut so that √(slope² + next²) ≤ 3 chords.
// Why so      An ordinary spline overshoots beside a step and invents negative absorbances there; this cannot.
// Valid for   strictly rising x. Nothing is extrapolated: NaN outside.
// Units       those of y.
// Source      F. N. Fritsch, R. E. Carlson, SIAM J. Numer. Anal. 1980, 17, 238.
import { expectAscending, expectFinite, expectLength, expectPoints } from './expectations.ts';

export type Curve = (x: number) => number;

/** @throws TankhueError `points-missing`, `axis-turns`, `length-differs`, `not-finite` */
export function linearCurve(x: ArrayLike<number>, y: ArrayLike<number>): Curve {
  expectKnots(x, y);
  return (at) => {
    const i = pieceOf(x, at);
    if (i < 0) return NaN;
    const share = (at - x[i]!) / (x[i + 1]! - x[i]!);
    return y[i]! * (1 - share) + y[i + 1]! * share;
  };
}

/** Monotone between neighbours wherever the points are. @throws as `linearCurve` */
export function monotoneCurve(x: ArrayLike<number>, y: ArrayLike<number>): Curve {
  expectKnots(x, y);
  const count = x.length;
  const chord = Float64Array.from({ length: count - 1 }, (_, i) => (y[i + 1]! - y[i]!) / (x[i + 1]! - x[i]!));
  const slope = Float64Array.from({ length: count }, (_, i) =>
    i === 0 ? chord[0]! : i === count - 1 ? chord[count - 2]! : (chord[i - 1]! + chord[i]!) / 2,
  );
  for (let i = 0; i < count - 1; i++) {
    // A level piece, or a turning point at one of its ends.
    if (chord[i] === 0) slope[i] = slope[i + 1] = 0;
    else {
      if (i > 0 && chord[i - 1]! * chord[i]! <= 0) slope[i] = 0;
      if (i < count - 2 && chord[i]! * chord[i + 1]! <= 0) slope[i + 1] = 0;
      const length = Math.hypot(slope[i]!, slope[i + 1]!);
      const most = 3 * Math.abs(chord[i]!);
      if (length > most) {
        slope[i] = (slope[i]! / length) * most;
        slope[i + 1] = (slope[i + 1]! / length) * most;
      }
    }
  }
  return (at) => {
    const i = pieceOf(x, at);
    if (i < 0) return NaN;
    const width = x[i + 1]! - x[i]!;
    const t = (at - x[i]!) / width;
    const rest = 1 - t;
    return (
      y[i]! * (1 + 2 * t) * rest * rest +
      y[i + 1]! * (3 - 2 * t) * t * t +
      width * t * rest * (slope[i]! * rest - slope[i + 1]! * t)
    );
  };
}

/** Index of the knot at or below; −1 outside. */
function pieceOf(x: ArrayLike<number>, at: number): number {
  if (!(at >= x[0]! && at <= x[x.length - 1]!)) return -1;
  let low = 0;
  let high = x.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (x[middle]! <= at) low = middle;
    else high = middle;
  }
  return low;
}

function expectKnots(x: ArrayLike<number>, y: ArrayLike<number>): void {
  expectPoints(x.length, 2, 'x');
  expectAscending(x, 'x');
  expectLength(y, x.length, 'y');
  expectFinite(y, 'y');
}
