// What        Molar masses of what is weighed on the bench.
// Equation    M = Σ nᵢ·mᵢ over the atoms of a formula.
// Why so      one table of atomic masses, so that two reagents never disagree about an atom.
// Valid for   ordinary terrestrial materials.
// Units       g/mol; relative standard uncertainty 2e-5 (spread of sulfur and hydrogen between sources).
// Source      IUPAC standard atomic weights 2021 (Pure Appl. Chem. 2022, 94, 573), abridged; from memory.

const ATOMIC_MASS = {
  V: 50.9415,
  H: 1.008,
  C: 12.011,
  N: 14.007,
  O: 15.999,
  Na: 22.99,
  S: 32.06,
  K: 39.098,
  Cr: 51.996,
  Fe: 55.845,
} as const;

export type Formula = Readonly<Partial<Record<keyof typeof ATOMIC_MASS, number>>>;

export const RELATIVE_MASS_UNCERTAINTY = 2e-5;

export const molarMass = (formula: Formula): number =>
  (Object.entries(formula) as [keyof typeof ATOMIC_MASS, number][]).reduce(
    (sum, [atom, count]) => sum + count * ATOMIC_MASS[atom],
    0,
  );

export const MOLAR_MASS = {
  vanadium: molarMass({ V: 1 }),
  water: molarMass({ H: 2, O: 1 }),
  sulfuricAcid: molarMass({ H: 2, S: 1, O: 4 }),
  vanadylSulfate: molarMass({ V: 1, S: 1, O: 5 }),
  vanadiumPentoxide: molarMass({ V: 2, O: 5 }),
  sodiumOxalate: molarMass({ Na: 2, C: 2, O: 4 }),
  ironAmmoniumSulfate: molarMass({ N: 2, H: 20, Fe: 1, S: 2, O: 14 }),
  potassiumDichromate: molarMass({ K: 2, Cr: 2, O: 7 }),
} as const;
