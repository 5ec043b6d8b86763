// What        Association constant of a complex by profile over the standards.
// Equation    RSS(K) of the unweighted fit with free paths, minimised over ln K; interval RSS(K) ≤ RSS_min (1 + F_0.95(1, ν)/ν).
// Why so      For given K the spectra are linear, so K is the only non-linear parameter and its profile shows how shallow the minimum is.
//             Residuals of one standard are all but one smooth error: ν counts standards, not wavelengths.
// Valid for   0.02 to 50 L/mol; a minimum at an end is reported as open on that side.
// Units       L/mol.
// Source      profile likelihood; Bates, Watts, Nonlinear Regression Analysis, 1988, ch. 6.
import { fQuantile } from '../numerics/distributions.ts';
import type { Association } from '../electrolyte/association.ts';
import { residualSumOfSquares, type PairStandards } from './fitPair.ts';

export interface ConstantProfile {
  readonly value: number;
  /** 95 % interval; null where the standards do not bound that side */
  readonly interval: readonly [number | null, number | null];
}

const SMALLEST = 0.02;
const LARGEST = 50;
const NODES = 16;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

const withConstant = (associations: readonly Association[], index: number, constant: number): Association[] =>
  associations.map((association, j) => (j === index ? { ...association, associationConstant: constant } : association));

/** @returns the associations with the constant of number `index` at the minimum of its profile */
export function withFittedConstant(
  standards: PairStandards,
  associations: readonly Association[],
  index: number,
): Association[] {
  return withConstant(associations, index, minimise(standards, associations, index).value);
}

/** Minimum and 95 % interval, for the record. */
export function profileConstant(
  standards: PairStandards,
  associations: readonly Association[],
  index: number,
): ConstantProfile {
  const { value, least } = minimise(standards, associations, index);
  const freedom = Math.max(1, standards.rows.length - 2 - associations.length);
  const limit = least * (1 + fQuantile(0.95, 1, freedom) / freedom);
  const rss = (constant: number): number =>
    residualSumOfSquares(standards, withConstant(associations, index, constant));
  const bound = (end: number): number | null => {
    if (rss(end) <= limit) return null;
    let inside = Math.log(value);
    let outside = Math.log(end);
    for (let step = 0; step < 20; step++) {
      const middle = (inside + outside) / 2;
      if (rss(Math.exp(middle)) <= limit) inside = middle;
      else outside = middle;
    }
    return Math.exp((inside + outside) / 2);
  };
  return { value, interval: [bound(SMALLEST), bound(LARGEST)] };
}

function minimise(
  standards: PairStandards,
  associations: readonly Association[],
  index: number,
): { value: number; least: number } {
  const rss = (logarithm: number): number =>
    residualSumOfSquares(standards, withConstant(associations, index, Math.exp(logarithm)));
  const step = Math.log(LARGEST / SMALLEST) / (NODES - 1);
  const nodes = Array.from({ length: NODES }, (_, i) => Math.log(SMALLEST) + i * step);
  const values = nodes.map(rss);
  const best = values.indexOf(Math.min(...values));
  let low = nodes[Math.max(0, best - 1)]!;
  let high = nodes[Math.min(NODES - 1, best + 1)]!;
  let x1 = high - GOLDEN * (high - low);
  let x2 = low + GOLDEN * (high - low);
  let f1 = rss(x1);
  let f2 = rss(x2);
  while (high - low > 0.01) {
    if (f1 < f2) {
      high = x2;
      x2 = x1;
      f2 = f1;
      x1 = high - GOLDEN * (high - low);
      f1 = rss(x1);
    } else {
      low = x1;
      x1 = x2;
      f1 = f2;
      x2 = low + GOLDEN * (high - low);
      f2 = rss(x2);
    }
  }
  return { value: Math.exp((low + high) / 2), least: Math.min(f1, f2, values[best]!) };
}
