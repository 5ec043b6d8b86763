// What        Minimum of a function of a few unknowns without derivatives.
// Equation    a simplex of n + 1 points: the worst is reflected (1), expanded (2), contracted (½), or all shrink towards the best (½).
// Why so      For criteria with corners or steps, where derivatives do not exist; where they do, levenbergMarquardt.ts is far better.
// Valid for   up to some five unknowns. It can stall away from a minimum (K. I. M. McKinnon, SIAM J. Optim. 1998, 9, 148), so it starts again
//             from its answer with a fresh simplex, turned, until two of them gain nothing.
// Units       those of the unknowns.
// Source      J. A. Nelder, R. Mead, Comput. J. 1965, 7, 308.
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';

export interface SimplexOptions {
  /** first edge along each unknown; a tenth of the start, or 0.1 where that is 0 */
  readonly edges?: readonly number[];
  /** relative spread of values, and of points relative to the first edges, at which it stops */
  readonly tolerance?: number;
  readonly evaluations?: number;
}

export interface SimplexMinimum {
  readonly point: number[];
  readonly value: number;
  readonly evaluations: number;
  /** false where the evaluations were used up first */
  readonly converged: boolean;
}

type Vertex = { readonly point: number[]; readonly value: number };

/** @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `not-positive` (an edge of 0) */
export function minimiseBySimplex(
  f: (point: readonly number[]) => number,
  start: readonly number[],
  { edges, tolerance = 1e-9, evaluations: most = 2000 * start.length }: SimplexOptions = {},
): SimplexMinimum {
  expectPoints(start.length, 1, 'start');
  expectFinite(start, 'start');
  const edge = edges ?? start.map((value) => Math.abs(value) / 10 || 0.1);
  expectLength(edge, start.length, 'edges');
  expectPositive(edge.map(Math.abs), 'edges');
  let evaluations = 0;
  const at = (point: number[]): Vertex => {
    evaluations++;
    const value = f(point);
    return { point, value: Number.isNaN(value) ? Infinity : value };
  };
  // The other way round at every fresh start, and both ways before it is believed: the same simplex would stall at the same place.
  let turned = edge;
  let idle = 0;
  let best = at([...start]);
  expectFinite([best.value], 'value at the start');
  const isUsedUp = (): boolean => evaluations >= most;
  while (!isUsedUp() && idle < 2) {
    const found = descend(best, turned, at, tolerance, isUsedUp);
    idle = best.value - found.value > tolerance * Math.abs(found.value) ? 0 : idle + 1;
    best = found;
    turned = turned.map((each) => -each);
  }
  return { point: [...best.point], value: best.value, evaluations, converged: !isUsedUp() };
}

function descend(
  start: Vertex,
  edges: readonly number[],
  at: (point: number[]) => Vertex,
  tolerance: number,
  isUsedUp: () => boolean,
): Vertex {
  const count = edges.length;
  const simplex = [start, ...edges.map((edge, j) => at(start.point.map((x, k) => (k === j ? x + edge : x))))];
  while (!isUsedUp()) {
    simplex.sort((a, b) => a.value - b.value);
    const [best, worst] = [simplex[0]!, simplex[count]!];
    const spread = Math.max(...edges.map((edge, j) => Math.abs((worst.point[j]! - best.point[j]!) / edge)));
    if (worst.value - best.value <= tolerance * Math.abs(best.value) && spread <= Math.sqrt(tolerance)) return best;
    if (spread <= Number.EPSILON * count) return best;
    const centre = edges.map((_, j) => simplex.slice(0, count).reduce((sum, { point }) => sum + point[j]!, 0) / count);
    const along = (factor: number): Vertex => at(centre.map((c, j) => c + factor * (worst.point[j]! - c)));
    const reflected = along(-1);
    if (reflected.value < best.value) {
      const expanded = along(-2);
      simplex[count] = expanded.value < reflected.value ? expanded : reflected;
      continue;
    }
    if (reflected.value < simplex[count - 1]!.value) {
      simplex[count] = reflected;
      continue;
    }
    const contracted = reflected.value < worst.value ? along(-0.5) : along(0.5);
    if (contracted.value < Math.min(reflected.value, worst.value)) {
      simplex[count] = contracted;
      continue;
    }
    for (let i = 1; i <= count; i++)
      simplex[i] = at(simplex[i]!.point.map((x, j) => best.point[j]! + (x - best.point[j]!) / 2));
  }
  return simplex.reduce((lowest, vertex) => (vertex.value < lowest.value ? vertex : lowest));
}
