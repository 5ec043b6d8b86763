// What        A zero of a function between two points of different sign, and a minimum of a function on an interval.
// Equation    inverse quadratic or secant steps, halving where they would not shrink the bracket; parabolic or golden-section steps.
// Why so      Never leaves the bracket and never needs a derivative, yet takes some ten evaluations where halving takes fifty.
// Valid for   continuous functions. A minimum is a local one: the only one if the function has one valley.
// Units       those of the argument.
// Source      R. P. Brent, Algorithms for Minimization without Derivatives, 1973, chapters 4 and 5.
import { TankhueError } from '../errors.ts';
import { expectFinite } from './expectations.ts';

/**
 * @param tolerance half width of the last bracket, in units of the argument; rounding of the root is added
 * @throws TankhueError `no-sign-change`, `not-finite`
 */
export function findRoot(f: (x: number) => number, low: number, high: number, tolerance = 0): number {
  expectFinite([low, high], 'bracket');
  let [a, b] = [low, high];
  let [fa, fb] = [f(a), f(b)];
  if (Number.isNaN(fa) || Number.isNaN(fb) || fa * fb > 0)
    throw new TankhueError(
      'no-sign-change',
      `expected the function to change sign between ${low} and ${high}; received ${fa} and ${fb}`,
      'bracket',
      'widen the bracket',
    );
  let [c, fc] = [a, fa];
  let step = b - a;
  let before = step;
  for (let round = 0; round < 200; round++) {
    // b is the best point, c the one across the root, a the one before.
    if (Math.abs(fc) < Math.abs(fb)) [a, b, c, fa, fb, fc] = [b, c, b, fb, fc, fb];
    const near = 2 * Number.EPSILON * Math.abs(b) + tolerance / 2;
    const half = (c - b) / 2;
    if (Math.abs(half) <= near || fb === 0) return b;
    const wanted = Math.abs(before) >= near && Math.abs(fa) > Math.abs(fb) ? interpolated() : null;
    if (wanted !== null) [before, step] = [step, wanted];
    else before = step = half;
    [a, fa] = [b, fb];
    b += Math.abs(step) > near ? step : Math.sign(half) * near;
    fb = f(b);
    if (fb > 0 === fc > 0) {
      [c, fc] = [a, fa];
      before = step = b - a;
    }

    function interpolated(): number | null {
      const s = fb / fa;
      let p: number;
      let q: number;
      if (a === c) [p, q] = [2 * half * s, 1 - s];
      else {
        const [r, t] = [fb / fc, fa / fc];
        p = s * (2 * half * t * (t - r) - (b - a) * (r - 1));
        q = (t - 1) * (r - 1) * (s - 1);
      }
      if (p > 0) q = -q;
      else p = -p;
      return 2 * p < Math.min(3 * half * q - Math.abs(near * q), Math.abs(before * q)) ? p / q : null;
    }
  }
  return b;
}

export interface Minimum {
  readonly x: number;
  readonly value: number;
}

const GOLDEN = (3 - Math.sqrt(5)) / 2;

/**
 * Minimum on an interval; an end of the interval where the function falls towards it.
 * @param tolerance relative to the argument; not below √ε, because a smooth function is flat within that of its minimum
 * @throws TankhueError `not-finite`
 */
export function minimiseOnInterval(f: (x: number) => number, low: number, high: number, tolerance = 1.5e-8): Minimum {
  expectFinite([low, high], 'interval');
  let [a, b] = [Math.min(low, high), Math.max(low, high)];
  let x = a + GOLDEN * (b - a);
  let [w, v] = [x, x];
  let fx = f(x);
  let [fw, fv] = [fx, fx];
  let step = 0;
  let before = 0;
  for (let round = 0; round < 200; round++) {
    const middle = (a + b) / 2;
    const near = tolerance * Math.abs(x) + 1e-12 * (high - low) + Number.MIN_VALUE;
    if (Math.abs(x - middle) <= 2 * near - (b - a) / 2) break;
    const [r, q0] = [(x - w) * (fx - fv), (x - v) * (fx - fw)];
    let p = (x - v) * q0 - (x - w) * r;
    let q = 2 * (q0 - r);
    if (q > 0) p = -p;
    q = Math.abs(q);
    if (Math.abs(before) > near && Math.abs(p) < Math.abs((q * before) / 2) && p > q * (a - x) && p < q * (b - x)) {
      [before, step] = [step, p / q];
      const u = x + step;
      if (u - a < 2 * near || b - u < 2 * near) step = x < middle ? near : -near;
    } else {
      before = (x < middle ? b : a) - x;
      step = GOLDEN * before;
    }
    const u = x + (Math.abs(step) >= near ? step : step > 0 ? near : -near);
    const fu = f(u);
    if (fu <= fx) {
      if (u < x) b = x;
      else a = x;
      [v, w, x, fv, fw, fx] = [w, x, u, fw, fx, fu];
    } else {
      if (u < x) a = u;
      else b = u;
      if (fu <= fw || w === x) [v, w, fv, fw] = [w, u, fw, fu];
      else if (fu <= fv || v === x || v === w) [v, fv] = [u, fu];
    }
  }
  return { x, value: fx };
}
