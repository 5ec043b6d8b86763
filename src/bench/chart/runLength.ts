// What        Average run length: how many points pass, on average, until a chart signals. Large is good while nothing has
//             changed, small is good after a shift.
// Equation    Shewhart: 1/P(|d| > 3). EWMA: L(u) = 1 + (1/λ) ∫ L(y) φ((y − (1 − λ)u)/λ − δ) dy over the limits.
//             CUSUM, one side: L(s) = 1 + L(0) Φ(k − s − δ) + ∫₀ʰ L(y) φ(y + k − s − δ) dy; two sides: 1/L = 1/L₊ + 1/L₋.
//             Run rules: Markov chain over what the rules still remember.
// Why so      computed, not looked up: the figure printed belongs to the limits in use, whatever they are.
// Valid for   independent normal points, known centre and standard deviation, starting from zero. Limits from a short
//             baseline signal more often than stated.
// Units       shift δ in standard deviations; result in points.
// Source      S. V. Crowder, Technometrics 1987, 29, 401 (EWMA); A. L. Goel, S. M. Wu, Technometrics 1971, 13, 221 (CUSUM);
//             C. W. Champ, W. H. Woodall, Technometrics 1987, 29, 393 (run rules).
import { normalCdf } from '../../numerics/distributions.ts';
import { gaussLegendre } from '../../numerics/gaussLegendre.ts';
import { solveSquare } from '../../numerics/matrix.ts';
import type { CumulativeSumDesign } from './cumulativeSum.ts';
import { movingAverageLimit, type MovingAverageDesign } from './movingAverage.ts';
import type { RunRule } from './runRules.ts';

const NODES = 80;

const ones = (count: number): number[] => Array.from({ length: count }, () => 1);

const normalDensity = (x: number): number => Math.exp(-0.5 * x * x) / Math.sqrt(2 * Math.PI);

/** @param shift of the mean, in standard deviations */
export function runLengthOfMovingAverage(design: MovingAverageDesign, shift: number): number {
  const { weight } = design;
  const half = movingAverageLimit(design);
  const { nodes, weights } = gaussLegendre(NODES, -half, half);
  const density = (from: number, to: number) => normalDensity((to - (1 - weight) * from) / weight - shift) / weight;
  const matrix = Array.from(nodes, (from, i) =>
    Array.from(nodes, (to, j) => (i === j ? 1 : 0) - weights[j]! * density(from, to)),
  );
  const lengths = solveSquare(matrix, ones(NODES));
  return 1 + nodes.reduce((sum, to, j) => sum + weights[j]! * density(0, to) * lengths[j]!, 0);
}

/** Both directions watched at once. @param shift of the mean, in standard deviations */
export function runLengthOfCumulativeSums(design: CumulativeSumDesign, shift: number): number {
  return 1 / (1 / oneSidedRunLength(design, shift) + 1 / oneSidedRunLength(design, -shift));
}

function oneSidedRunLength({ slack, limit }: CumulativeSumDesign, shift: number): number {
  const { nodes, weights } = gaussLegendre(NODES, 0, limit);
  // Unknowns: the length from zero, then from each node.
  const starts = [0, ...nodes];
  const matrix = starts.map((from, i) => [
    (i === 0 ? 1 : 0) - normalCdf(slack - from - shift),
    ...Array.from(nodes, (to, j) => (i === j + 1 ? 1 : 0) - weights[j]! * normalDensity(to + slack - from - shift)),
  ]);
  return solveSquare(matrix, ones(starts.length))[0]!;
}

/** @param shift of the mean, in standard deviations */
export function runLengthOfRunRules(rules: readonly RunRule[], shift: number): number {
  const edges = [...new Set(rules.flatMap((rule) => [rule.beyond, -rule.beyond]))].sort((a, b) => a - b);
  const zones = [-Infinity, ...edges].map((low, i) => {
    const high = edges[i] ?? Infinity;
    return { low, high, probability: normalCdf(high - shift) - normalCdf(low - shift) };
  });
  const watchers = rules.flatMap((rule) => [1, -1].map((side) => ({ rule, side })));

  // A state is, for each rule and side, which of its last window − 1 points were beyond (bit 0 the newest).
  const start = watchers.map(() => 0);
  const indexOf = new Map<string, number>([[start.join(), 0]]);
  const states = [start];
  const moves: Move[][] = [];
  for (let s = 0; s < states.length; s++) {
    const state = states[s]!;
    moves[s] = [];
    for (const { low, high, probability } of zones) {
      const next = watchers.map(({ rule, side }, w) => {
        const isBeyond = side === 1 ? low >= rule.beyond : high <= -rule.beyond;
        return advanceMemory(state[w]!, isBeyond, rule);
      });
      if (next.includes(SIGNALLED)) continue;
      const key = next.join();
      let to = indexOf.get(key);
      if (to === undefined) {
        to = states.length;
        indexOf.set(key, to);
        states.push(next);
      }
      moves[s]!.push({ to, probability });
    }
  }
  return expectedSurvival(moves);
}

interface Move {
  readonly to: number;
  readonly probability: number;
}

/**
 * Σ_n P(no signal up to point n) from state 0: the chain is walked until the survival falls by a constant factor, the rest is a
 * geometric series. A linear solve of the same chain takes a hundred times as long.
 */
function expectedSurvival(moves: readonly (readonly Move[])[]): number {
  let occupied = new Float64Array(moves.length);
  occupied[0] = 1;
  let survival = 1;
  let total = 1;
  let ratio = 0;
  for (let point = 1; ; point++) {
    const next = new Float64Array(moves.length);
    occupied.forEach((weight, from) => {
      if (weight > 0) for (const { to, probability } of moves[from]!) next[to]! += weight * probability;
    });
    const left = next.reduce((sum, weight) => sum + weight, 0);
    const newRatio = left / survival;
    total += left;
    if (left < 1e-16) return total;
    if (Math.abs(newRatio - ratio) < 1e-14 || point === LONGEST_WALK) return total + (left * newRatio) / (1 - newRatio);
    [occupied, survival, ratio] = [next, left, newRatio];
  }
}

/** Points after which the ratio has settled to rounding for every rule set of this size. */
const LONGEST_WALK = 5000;

const SIGNALLED = -1;

/** The memory after one more point, stripped of points that cannot take part in a signal any more (this keeps the chain small). */
function advanceMemory(memory: number, isBeyond: boolean, { needed, window }: RunRule): number {
  const bits = (memory << 1) | (isBeyond ? 1 : 0);
  if (isBeyond && countOnes(bits) >= needed) return SIGNALLED;
  let kept = 0;
  let ones = 0;
  for (let age = 0; age < window - 1; age++) {
    if ((bits & (1 << age)) === 0) continue;
    ones += 1;
    if (ones + (window - 1 - age) >= needed) kept |= 1 << age;
  }
  return kept;
}

function countOnes(bits: number): number {
  let count = 0;
  for (let rest = bits; rest > 0; rest >>= 1) count += rest & 1;
  return count;
}
