// What        Analysis of variance of a fully nested, possibly unbalanced design: how much scatter each level adds.
// Equation    Q_j = Σ_groups n ȳ², SS_j = Q_j − Q_{j−1}, E[SS_j] = Σ_{i≥j} σ_i² (K_ij − K_i,j−1),
//             K_ij = Σ_{groups g of j} Σ_{h in g of i} n_h²/n_g (= N where i ≤ j). Solved from the innermost level outwards.
// Why so      the expected sums of squares hold for any group sizes (Henderson's first method); for balanced data this is the
//             textbook analysis. Groups of level 0 are fixed: their means are taken out and cost one degree of freedom each.
// Valid for   every level with more groups than the level above, and repeats in the innermost groups; random effects independent.
// Units       those of the data, squared. A negative estimate is returned as it is.
// Source      C. R. Henderson, Biometrics 1953, 9, 226; ISO 5725-3; degrees of freedom of sums: F. E. Satterthwaite, Biometrics
//             Bulletin 1946, 2, 110. NIST StRD checks the one-way case.
import { TankhueError } from '../errors.ts';
import { mean } from './meanAndDeviation.ts';

export interface NestedLevel {
  readonly sumOfSquares: number;
  readonly degreesOfFreedom: number;
  readonly meanSquare: number;
  /** estimate of the variance this level adds; may be negative */
  readonly variance: number;
  /** weights of the mean squares (levels 1 … k + 1) in that estimate */
  readonly fromMeanSquares: readonly number[];
}

/**
 * @param groups for each line the group keys, outermost first; the first is fixed, the others are random. Keys need to be unique
 *               within their parent only.
 * @param values one a line
 * @returns the random levels, outermost first, and last the scatter between lines of one innermost group
 * @throws TankhueError `level-confounded` when a level has as many groups as the one above it (or the innermost as many as lines)
 */
export function nestedAnova(groups: readonly (readonly string[])[], values: readonly number[]): NestedLevel[] {
  const depth = groups[0]!.length;
  const origin = values[0]!;
  const shifted = values.map((value) => value - origin);
  // Level 0 … depth − 1 by their keys, then every line by itself.
  const levels = Array.from({ length: depth + 1 }, (_, level) =>
    membersOf(
      level === depth
        ? values.map((__, i) => String(i))
        : groups.map((keys) => JSON.stringify(keys.slice(0, level + 1))),
    ),
  );
  levels.slice(1).forEach((level, j) => {
    if (level.length === levels[j]!.length)
      throw new TankhueError(
        'level-confounded',
        `expected level ${j + 1} to have more groups than level ${j}; received ${level.length} groups in both`,
        `groups[].${j + 1}`,
        'leave that level out: nothing on the sheet tells it from its neighbour',
      );
  });
  // E[SS_j] for variance i: coefficient[j][i], i ≥ j, levels counted from 1.
  const count = depth;
  const size = (i: number, j: number): number => overlap(levels[i]!, levels[j]!, values.length);
  const meanSquares: number[] = [];
  const rows: number[][] = [];
  const sums: { sumOfSquares: number; degreesOfFreedom: number }[] = [];
  for (let j = 1; j <= count; j++) {
    const sumOfSquares = squaresAbout(levels[j]!, levels[j - 1]!, shifted);
    const degreesOfFreedom = levels[j]!.length - levels[j - 1]!.length;
    sums.push({ sumOfSquares, degreesOfFreedom });
    meanSquares.push(sumOfSquares / degreesOfFreedom);
    rows.push(
      Array.from({ length: count }, (_, i) =>
        i + 1 < j ? 0 : (size(i + 1, j) - size(i + 1, j - 1)) / degreesOfFreedom,
      ),
    );
  }
  const fromMeanSquares: number[][] = [];
  for (let i = count - 1; i >= 0; i--) {
    const weights = rows.map(() => 0);
    weights[i] = 1 / rows[i]![i]!;
    for (let k = i + 1; k < count; k++)
      for (let m = 0; m < count; m++) weights[m]! -= (rows[i]![k]! / rows[i]![i]!) * fromMeanSquares[k]![m]!;
    fromMeanSquares[i] = weights;
  }
  return sums.map((level, i) => ({
    ...level,
    meanSquare: meanSquares[i]!,
    variance: fromMeanSquares[i]!.reduce((sum, weight, m) => sum + weight * meanSquares[m]!, 0),
    fromMeanSquares: fromMeanSquares[i]!,
  }));
}

function membersOf(keys: readonly string[]): number[][] {
  const members = new Map<string, number[]>();
  keys.forEach((key, i) => {
    const group = members.get(key);
    if (group) group.push(i);
    else members.set(key, [i]);
  });
  return [...members.values()];
}

/** K_ij for level i at or inside level j: Σ over groups g of j of Σ n_h²/n_g over the groups h of i inside g. */
function overlap(inner: readonly number[][], outer: readonly number[][], lines: number): number {
  if (inner.length <= outer.length) return lines;
  const outerSize = new Float64Array(lines);
  for (const group of outer) for (const line of group) outerSize[line] = group.length;
  return inner.reduce((sum, group) => sum + group.length ** 2 / outerSize[group[0]!]!, 0);
}

/** Σ n (mean of the group − mean of its parent)²: the same as a difference of Q, without its cancellation. */
function squaresAbout(groups: readonly number[][], parents: readonly number[][], values: readonly number[]): number {
  const parentMean = new Float64Array(values.length);
  for (const parent of parents) {
    const centre = meanOf(parent, values);
    for (const line of parent) parentMean[line] = centre;
  }
  return groups.reduce((sum, group) => sum + group.length * (meanOf(group, values) - parentMean[group[0]!]!) ** 2, 0);
}

const meanOf = (lines: readonly number[], values: readonly number[]): number =>
  mean(lines.map((line) => values[line]!));
