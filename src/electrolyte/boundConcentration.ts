// What        Concentration of a one-to-one complex A + B ⇌ AB; here V(IV) with V(V).
// Equation    K = x / ((a − x)(b − x)); smaller root x = 2ab / (s + √((a − b)² + (2(a + b) + 1/K)/K)), s = a + b + 1/K.
// Why so      ½(s − √(s² − 4ab)) subtracts near-equal numbers when K(a + b) is small: 5 of 16 digits are gone
//             in a 1000-fold dilution, all at K = 1e-12. Here every term is positive, so none are lost.
// Valid for   K ≥ 0, totals ≥ 0; a total slightly below zero (noise) gives the smooth continuation, slightly below zero.
//             Activity coefficients are inside K: one K for one acid and one temperature.
// Units       mol/L in the cuvette, not in the tank; K in L/mol.
// Source      Blanc, Madic, Launay, Inorg. Chem. 1982, 21, 2923 (that it is one to one); algebra ours.
import { TankhueError } from '../errors.ts';

/** @throws TankhueError `association-constant` */
export function requireAssociationConstant(associationConstant: number, where: string): void {
  if (!(associationConstant >= 0 && associationConstant < Infinity))
    throw new TankhueError(
      'association-constant',
      `expected a constant of 0 L/mol or more; received ${associationConstant}`,
      where,
      'leave the association out if the electrolyte has none',
    );
}

/**
 * @param a total V(IV), bound and free, mol/L in the cuvette
 * @param b total V(V), bound and free, mol/L in the cuvette
 * @param K association constant, L/mol
 * @returns the bound part, mol/L, never above the smaller total
 * @throws TankhueError `association-constant`
 */
export function boundConcentration(a: number, b: number, K: number): number {
  requireAssociationConstant(K, 'associations[].associationConstant');
  if (K === 0) return 0;
  const s = a + b + 1 / K;
  return (2 * a * b) / (s + Math.sqrt(Math.max(0, (a - b) ** 2 + (2 * (a + b) + 1 / K) / K)));
}
