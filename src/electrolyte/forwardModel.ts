// What        The amounts that absorb, for a pair of neighbouring species and its associations.
// Equation    A(λ) = ℓ Σ_k y_k(c) e_k(λ);  y = (c_lower, c_higher, x_1, x_2, …), e = (ε_lower, ε_higher, p_1, p_2, …).
// Why so      Linear in the spectra for given concentrations (so a calibration is linear least squares) and in few amounts for given
//             spectra (so an assay is a fit in a handful of dimensions). Totals are the unknowns: nobody prepares free ions.
// Valid for   one pair at a time: only neighbours coexist.
// Units       c mol/L in the cuvette; ε and p in L/(mol·cm); in the weak limit x = product of totals and p in L²/(mol²·cm).
// Source      Beer-Lambert law, mass action.
import { stoichiometryIn, type Association } from './association.ts';
import { solveMassAction, type TwoComponentAssociation } from './massAction.ts';
import type { Pair } from './species.ts';

/** The absorbing amounts at one composition, with their derivatives by the totals of the lower and the higher species. */
export interface AbsorbingAmounts {
  readonly amount: Float64Array;
  readonly byLower: Float64Array;
  readonly byHigher: Float64Array;
}

/** Evaluates the amounts for totals in mol/L in the cuvette. Results are written into `out`, which is returned. */
export type AmountsFunction = (lower: number, higher: number, out: AbsorbingAmounts) => AbsorbingAmounts;

export const newAmounts = (count: number): AbsorbingAmounts => ({
  amount: new Float64Array(count),
  byLower: new Float64Array(count),
  byHigher: new Float64Array(count),
});

/** @throws TankhueError `association-outside-pair`, `association-constant` */
export function amountsOf(pair: Pair, associations: readonly Association[]): AmountsFunction {
  const all = associations.map((association, j): TwoComponentAssociation => {
    const [lower, higher] = stoichiometryIn(pair, association, `associations[${j}]`);
    return { lower, higher, constant: association.associationConstant };
  });
  const strong = all.filter((x) => x.constant > 0);
  const only = strong.length === 1 && strong[0]!.lower === 1 && strong[0]!.higher === 1 ? strong[0]! : null;
  return (lower, higher, out) => {
    out.amount[0] = lower;
    out.byLower[0] = 1;
    out.byHigher[0] = 0;
    out.amount[1] = higher;
    out.byLower[1] = 0;
    out.byHigher[1] = 1;
    const equilibrium = only || strong.length === 0 ? null : solveMassAction(lower, higher, strong);
    let s = 0;
    for (let j = 0; j < all.length; j++) {
      const x = all[j]!;
      if (x.constant === 0) weakLimit(x, lower, higher, out, 2 + j);
      else if (only) oneToOne(x.constant, lower, higher, out, 2 + j);
      else {
        out.amount[2 + j] = equilibrium!.amount[s]!;
        out.byLower[2 + j] = equilibrium!.byLower[s]!;
        out.byHigher[2 + j] = equilibrium!.byHigher[s]!;
        s += 1;
      }
    }
    return out;
  };
}

function weakLimit(x: TwoComponentAssociation, lower: number, higher: number, out: AbsorbingAmounts, k: number): void {
  out.amount[k] = lower ** x.lower * higher ** x.higher;
  out.byLower[k] = x.lower === 0 ? 0 : x.lower * lower ** (x.lower - 1) * higher ** x.higher;
  out.byHigher[k] = x.higher === 0 ? 0 : x.higher * higher ** (x.higher - 1) * lower ** x.lower;
}

/** The closed form of `boundConcentration` with its derivatives: dx/da = (b − x)/(s − 2x), dx/db = (a − x)/(s − 2x). */
function oneToOne(K: number, a: number, b: number, out: AbsorbingAmounts, k: number): void {
  const s = a + b + 1 / K;
  const root = Math.sqrt(Math.max(1e-300, (a - b) * (a - b) + (2 * (a + b) + 1 / K) / K));
  const x = (2 * a * b) / (s + root);
  out.amount[k] = x;
  out.byLower[k] = (b - x) / root;
  out.byHigher[k] = (a - x) / root;
}
