// What        A bottle on the bench: what it holds, how well that is known, and how much acid of it is free.
// Equation    free acid (as H₂SO₄) = total sulfate − ½ Σ zᵢcᵢ, z = 2, 3, 2, 1 for V²⁺, V³⁺, VO²⁺, VO₂⁺.
// Why so      Sulfate is kept by mixing, dilution and by a cell with a proton-conducting membrane, and solutions are neutral; so the acid
//             that dissolution, reaction or electrolysis uses up or sets free needs no book of its own.
// Valid for   sulfate electrolytes without other anions or salts; HSO₄⁻ counts as acid.
// Units       mol/L, mL.
// Source      electroneutrality.
import { SPECIES, type Species } from '../../electrolyte/species.ts';
import { exactly, measured, sumOf, uncertaintyOf, type Measured } from '../../numerics/measured.ts';

export type MeasuredComposition = Readonly<Record<Species, Measured>>;

export interface Stock {
  readonly name: string;
  /** mol/L; all zero for acid or water */
  readonly concentration: MeasuredComposition;
  /** total sulfate, mol/L; null where nobody said */
  readonly sulfate: number | null;
  /** mL */
  readonly available: number;
  /** g/mL; null where nobody said */
  readonly density: number | null;
  /** stocks of one making carry one name */
  readonly preparation: string;
  /** `file:line` */
  readonly where: string;
}

const CHARGE: Readonly<Record<Species, number>> = { V2: 2, V3: 3, V4: 2, V5: 1 };

/** mol/L of H₂SO₄ not bound by vanadium; below zero where the sulfate stated cannot be. */
export const freeAcid = (concentration: Readonly<Record<Species, number>>, sulfate: number): number =>
  sulfate - SPECIES.reduce((sum, species) => sum + CHARGE[species] * concentration[species], 0) / 2;

export const totalOf = (concentration: MeasuredComposition): Measured =>
  sumOf(...SPECIES.map((species) => concentration[species]));

export const valuesOf = (concentration: MeasuredComposition): Record<Species, number> =>
  Object.fromEntries(SPECIES.map((species) => [species, concentration[species].value])) as Record<Species, number>;

export const holdsVanadium = ({ concentration }: Stock): boolean => totalOf(concentration).value > 0;

/** One composition from several portions: Σ factorᵢ·compositionᵢ. */
export const combined = (
  portions: readonly { concentration: MeasuredComposition; times: (one: Measured) => Measured }[],
): MeasuredComposition =>
  Object.fromEntries(
    SPECIES.map((species) => [
      species,
      sumOf(...portions.map(({ concentration, times }) => times(concentration[species]))),
    ]),
  ) as Record<Species, Measured>;

/** Largest uncertainty of the states that are there, mol/L. */
export const labelUncertainty = (concentration: MeasuredComposition): number =>
  Math.max(...SPECIES.map((species) => uncertaintyOf(concentration[species])));

export const mapped = (concentration: MeasuredComposition, change: (one: Measured) => Measured): MeasuredComposition =>
  Object.fromEntries(SPECIES.map((species) => [species, change(concentration[species])])) as Record<Species, Measured>;

const zero = exactly(0);
export const NOTHING: MeasuredComposition = { V2: zero, V3: zero, V4: zero, V5: zero };

/** Standard uncertainty of the mean oxidation state of a stock that is called pure [common practice]. */
export const USUAL_PURITY = 0.002;

/**
 * A composition whose states are not sharper than `moved` mol/L: some of the vanadium may be in the neighbouring state, while the total stays.
 * Of a mixture the neighbour is its other state, of a pure one the next higher, of V(V) the next lower.
 */
export function withPurity(concentration: MeasuredComposition, moved: number, name: string): MeasuredComposition {
  const present = SPECIES.filter((species) => concentration[species].value > 0);
  const from = present[0]!;
  const to = present[1] ?? SPECIES[SPECIES.indexOf(from) + 1] ?? 'V4';
  const move = (species: Species): number => (species === to ? moved : species === from ? -moved : 0);
  return Object.fromEntries(
    SPECIES.map((species) => [
      species,
      sumOf(concentration[species], measured(0, move(species), `purity of ${name}:state`)),
    ]),
  ) as Record<Species, Measured>;
}
