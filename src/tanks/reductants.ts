// What        What one mole of electrons costs in reductant, and the gas it makes.
// Equation    H₂C₂O₄ → 2 CO₂ + 2 H⁺ + 2 e⁻;  HCOOH → CO₂ + 2 H⁺ + 2 e⁻.
// Why so      Only reductants whose products leave as gas or are water: nothing foreign stays in the electrolyte.
// Valid for   complete reaction in a charged positive tank, stirred and vented.
// Units       mol, g/mol, litres of gas at 25 °C and 101.325 kPa.
// Source      half reactions balanced by test; atomic masses IUPAC 2021 (abridged), molar volume RT/p. Hydrazine, peroxide, chlorates and SO₂
//             are not offered: carcinogen, violent or toxic.

export interface Reductant {
  readonly name: string;
  readonly formula: string;
  /** g/mol as weighed */
  readonly molarMass: number;
  readonly electrons: number;
  /** mol CO₂ per mol */
  readonly carbonDioxide: number;
  readonly note: string;
}

export const REDUCTANTS: readonly Reductant[] = [
  {
    name: 'oxalic acid dihydrate',
    formula: 'H2C2O4·2H2O',
    molarMass: 126.064,
    electrons: 2,
    carbonDioxide: 2,
    note: 'slow when cold, foams',
  },
  {
    name: 'formic acid',
    formula: 'HCOOH',
    molarMass: 46.025,
    electrons: 2,
    carbonDioxide: 1,
    note: 'slower; corrosive liquid and vapour',
  },
];

/** Litres of an ideal gas per mole at 25 °C and 101.325 kPa: RT/p. */
export const MOLAR_GAS_VOLUME = (8.314462618 * 298.15) / 101.325;

/** kg of a reductant for mol of electrons, rounded down to 10 g steps (never more than was asked). */
export const weighable = (reductant: Reductant, electrons: number): number =>
  Math.floor((electrons / reductant.electrons) * reductant.molarMass * 0.1 + 1e-9) / 100;
