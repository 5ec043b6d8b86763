// What        Least squares with limits on every unknown: minimise |Ax − b| with low ≤ x ≤ high.
// Equation    active sets: an unknown at a limit is freed when the gradient points inwards, the free ones are solved, and the step is cut at the
//             first limit it meets. At the end no gradient points inwards (Kuhn-Tucker), so no other x within the limits is better.
// Why so      finite and exact for a handful of unknowns; the answer uses no more unknowns between their limits than there are equations,
//             which on the bench means few pipettings.
// Valid for   some ten unknowns. Where answers are equally good, a weight of 1e-7 of the largest column prefers small ones.
// Units       those of b over those of A.
// Source      C. L. Lawson, R. J. Hanson, Solving Least Squares Problems, 1974, ch. 23; P. B. Stark, R. L. Parker, Comput. Stat. 1995, 10, 129.
import { dot } from './gramSchmidt.ts';
import { fitLinear } from './linearFit.ts';

const RIDGE = 1e-7;
const ROUNDS = 200;

/** @param columns of A @param high may be Infinity @returns x and |Ax − b| */
export function boundedLeastSquares(
  columns: readonly Float64Array[],
  b: Float64Array,
  low: readonly number[],
  high: readonly number[],
): { x: number[]; residual: Float64Array } {
  const scale = RIDGE * (Math.max(...columns.map((column) => Math.sqrt(dot(column, column)))) || 1);
  // The ridge rows also keep the free columns independent.
  const ridged = columns.map((column, j) => {
    const longer = new Float64Array(b.length + columns.length);
    longer.set(column);
    longer[b.length + j] = scale;
    return longer;
  });
  const x = low.map((limit) => limit);
  const state = x.map((): 'low' | 'free' | 'high' => 'low');
  const target = new Float64Array(b.length + columns.length);
  target.set(b);
  const tolerance =
    1e-10 * Math.max(1e-300, ...ridged.map((column) => Math.sqrt(dot(column, column)))) * (Math.sqrt(dot(b, b)) || 1);
  let justFixed = -1;
  for (let round = 0; round < ROUNDS; round++) {
    const residual = residualOf(ridged, target, x);
    const inward = ridged.map((column, j) => {
      const gradient = dot(column, residual);
      return j === justFixed || state[j] === 'free' ? 0 : state[j] === 'low' ? gradient : -gradient;
    });
    const best = inward.indexOf(Math.max(...inward));
    if (!(inward[best]! > tolerance)) break;
    state[best] = 'free';
    justFixed = -1;
    for (;;) {
      const free = [...state.keys()].filter((j) => state[j] === 'free');
      if (free.length === 0) break;
      const rest = residualOf(
        ridged,
        target,
        x.map((value, j) => (state[j] === 'free' ? 0 : value)),
      );
      const solved = fitLinear(
        free.map((j) => ridged[j]!),
        rest,
      ).coefficients;
      let share = 1;
      let blocked = -1;
      free.forEach((j, i) => {
        const [value, wanted] = [x[j]!, solved[i]!];
        const limit = wanted < low[j]! ? low[j]! : wanted > high[j]! ? high[j]! : null;
        if (limit === null) return;
        const reach = wanted === value ? 0 : (limit - value) / (wanted - value);
        if (reach < share || blocked < 0) [share, blocked] = [Math.min(share, Math.max(0, reach)), j];
      });
      free.forEach((j, i) => (x[j] = x[j]! + share * (solved[i]! - x[j]!)));
      if (blocked < 0) break;
      state[blocked] = solved[free.indexOf(blocked)]! < low[blocked]! ? 'low' : 'high';
      x[blocked] = state[blocked] === 'low' ? low[blocked]! : high[blocked]!;
      if (blocked === best) {
        // Freed and blocked at once: rounding; it may not be tried again before something else has moved.
        justFixed = best;
        break;
      }
    }
  }
  return { x, residual: residualOf(columns, b, x) };
}

function residualOf(columns: readonly Float64Array[], b: Float64Array, x: readonly number[]): Float64Array {
  const residual = Float64Array.from(b);
  columns.forEach((column, j) => {
    for (let i = 0; i < residual.length; i++) residual[i]! -= column[i]! * x[j]!;
  });
  return residual;
}
