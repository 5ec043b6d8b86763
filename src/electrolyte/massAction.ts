// What        Equilibrium of any list of associations of two components, n_j A + m_j B ⇌ C_j.
// Equation    f_A + Σ n_j K_j f_A^n_j f_B^m_j = a,  f_B + Σ m_j K_j f_A^n_j f_B^m_j = b  (f free, a and b totals).
// Why so      Newton in u = ln f_A, v = ln f_B: concentrations stay positive by themselves and the system is the gradient of a
//             convex function, so a damped step always converges for K ≥ 0. Derivatives of the amounts by the totals come from the
//             implicit function theorem on the same 2 × 2 matrix, not from differences.
// Valid for   K ≥ 0. A total at or below zero has no logarithm: the amounts are continued linearly from a trace of it.
// Units       mol/L in the cuvette; K in L^(n+m−1)/mol^(n+m−1).
// Source      mass action; algebra ours.

/** One association of the two components: reactant numbers and constant. */
export interface TwoComponentAssociation {
  readonly lower: number;
  readonly higher: number;
  readonly constant: number;
}

export interface Equilibrium {
  readonly freeLower: number;
  readonly freeHigher: number;
  /** mol/L of each complex, and its derivatives by the two totals */
  readonly amount: Float64Array;
  readonly byLower: Float64Array;
  readonly byHigher: Float64Array;
}

const TRACE = 1e-12;
const MOST_STEPS = 200;

/** @returns the amounts of every association at totals `lower`, `higher` (mol/L in the cuvette), with derivatives */
export function solveMassAction(
  lower: number,
  higher: number,
  associations: readonly TwoComponentAssociation[],
): Equilibrium {
  const scale = Math.max(Math.abs(lower), Math.abs(higher), TRACE);
  const a = Math.max(lower, TRACE * scale);
  const b = Math.max(higher, TRACE * scale);
  const [u, v] = newtonInLogarithms(a, b, associations);
  const freeLower = Math.exp(u);
  const freeHigher = Math.exp(v);
  const amount = Float64Array.from(associations, (x) => x.constant * freeLower ** x.lower * freeHigher ** x.higher);
  const byLower = new Float64Array(amount.length);
  const byHigher = new Float64Array(amount.length);
  // d(u,v)/d(a,b) is the inverse of the symmetric matrix H = diag(f) + Σ (n,m)(n,m)ᵀ x.
  const [haa, hab, hbb] = hessian(freeLower, freeHigher, associations, amount);
  const det = haa * hbb - hab * hab;
  associations.forEach((x, j) => {
    byLower[j] = (amount[j]! * (x.lower * hbb - x.higher * hab)) / det;
    byHigher[j] = (amount[j]! * (x.higher * haa - x.lower * hab)) / det;
    amount[j]! += byLower[j]! * (lower - a) + byHigher[j]! * (higher - b);
  });
  return { freeLower, freeHigher, amount, byLower, byHigher };
}

function hessian(
  freeLower: number,
  freeHigher: number,
  associations: readonly TwoComponentAssociation[],
  amount: Float64Array,
): [number, number, number] {
  let haa = freeLower;
  let hab = 0;
  let hbb = freeHigher;
  associations.forEach((x, j) => {
    haa += x.lower * x.lower * amount[j]!;
    hab += x.lower * x.higher * amount[j]!;
    hbb += x.higher * x.higher * amount[j]!;
  });
  return [haa, hab, hbb];
}

/** Minimises the convex Φ(u, v) = f_A + f_B + Σ x_j − a·u − b·v, whose gradient is the mass balance. */
function newtonInLogarithms(a: number, b: number, associations: readonly TwoComponentAssociation[]): [number, number] {
  let u = Math.log(a);
  let v = Math.log(b);
  const potential = (p: number, q: number): number => {
    let sum = Math.exp(p) + Math.exp(q) - a * p - b * q;
    for (const x of associations) sum += x.constant * Math.exp(x.lower * p + x.higher * q);
    return sum;
  };
  let value = potential(u, v);
  for (let step = 0; step < MOST_STEPS; step++) {
    const fa = Math.exp(u);
    const fb = Math.exp(v);
    const amount = Float64Array.from(associations, (x) => x.constant * fa ** x.lower * fb ** x.higher);
    let ga = fa - a;
    let gb = fb - b;
    associations.forEach((x, j) => {
      ga += x.lower * amount[j]!;
      gb += x.higher * amount[j]!;
    });
    if (Math.abs(ga) <= 4e-16 * a && Math.abs(gb) <= 4e-16 * b) break;
    const [haa, hab, hbb] = hessian(fa, fb, associations, amount);
    const det = haa * hbb - hab * hab;
    const du = -(ga * hbb - gb * hab) / det;
    const dv = -(gb * haa - ga * hab) / det;
    let damping = Math.min(1, 4 / Math.max(Math.abs(du), Math.abs(dv), 1e-300));
    let next = potential(u + damping * du, v + damping * dv);
    // Close to the minimum the potential is flat to the last digit of its terms, and only the full step converges.
    const flat = 1e-14 * (a + b + Math.abs(a * u) + Math.abs(b * v));
    while (next > value + flat && damping > 1e-6) {
      damping /= 2;
      next = potential(u + damping * du, v + damping * dv);
    }
    u += damping * du;
    v += damping * dv;
    value = next;
    if (Math.max(Math.abs(du), Math.abs(dv)) < 1e-15) break;
  }
  return [u, v];
}
