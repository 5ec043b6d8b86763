// What        The redox couples that set the potential of a titration, and the titrants made of them.
// Equation    E = E°′ + (s/z)·log10([ox]/[red]) + (m/z)·s·log10[H⁺], s = ln 10·RT/F (59.16 mV at 25 °C).
// Why so      One table serves the simulator (all of it) and the evaluation (electrons, protons, and whether the couple obeys Nernst).
// Valid for   sulfuric acid of about 1 mol/L H⁺; formal potentials move by 0.1 V with acid and complexing, which no result rests on.
// Units       V against the standard hydrogen electrode.
// Source      vanadium: −0.255, 0.337, 1.000 V (Bratsch, J. Phys. Chem. Ref. Data 1989, 18, 1); the others from memory of analytical
//             handbooks: Fe 0.68, Ce 1.44 (both in 1 mol/L H₂SO₄), MnO₄⁻ 1.51, Cr₂O₇²⁻ 1.15 (in 2-4 mol/L H₂SO₄).
import { AMPERE_HOURS_PER_MOLE } from '../../units.ts';

export interface Couple {
  /** as the step of a titration is written, lower state first */
  readonly name: string;
  /** V at [H⁺] = 1 mol/L */
  readonly formalPotential: number;
  readonly electrons: number;
  /** protons taken up by the reduction */
  readonly protons: number;
  /** whether an electrode follows it by Nernst's law; permanganate, dichromate and oxalate are too slow for that */
  readonly reversible: boolean;
}

export const COUPLES = {
  'V2/V3': { name: 'V(II) → V(III)', formalPotential: -0.255, electrons: 1, protons: 0, reversible: true },
  'V3/V4': { name: 'V(III) → V(IV)', formalPotential: 0.337, electrons: 1, protons: 2, reversible: true },
  'V4/V5': { name: 'V(IV) → V(V)', formalPotential: 1.0, electrons: 1, protons: 2, reversible: true },
  iron: { name: 'Fe(II) → Fe(III)', formalPotential: 0.68, electrons: 1, protons: 0, reversible: true },
  cerium: { name: 'Ce(III) → Ce(IV)', formalPotential: 1.44, electrons: 1, protons: 0, reversible: true },
  permanganate: { name: 'Mn(II) → Mn(VII)', formalPotential: 1.51, electrons: 5, protons: 8, reversible: false },
  dichromate: { name: 'Cr(III) → Cr(VI)', formalPotential: 1.15, electrons: 6, protons: 14, reversible: false },
} as const satisfies Record<string, Couple>;

export const TITRANTS = ['permanganate', 'cerium', 'dichromate', 'iron'] as const;
export type Titrant = (typeof TITRANTS)[number];
export const OXIDANTS = ['permanganate', 'cerium', 'dichromate'] as const;
export type Oxidant = (typeof OXIDANTS)[number];

export const isOxidant = (titrant: Titrant): titrant is Oxidant => titrant !== 'iron';

/** Nernst's ln 10·RT/F, mV for a factor of ten and one electron. */
export const nernstSlope = (temperature: number): number =>
  (1000 * Math.LN10 * 8.31446261815324 * temperature) / (AMPERE_HOURS_PER_MOLE * 3600);
