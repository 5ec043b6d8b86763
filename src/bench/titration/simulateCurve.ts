// What        A titration curve of known truth: the potential of the solution after every addition of titrant.
// Equation    all couples share one potential E, and electrons are kept: n_V·ν(E) + n_Fe·φ_Fe(E) + Σ z·n·φ(E) of each oxidant
//             = its value before anything reacted; shares φ by mass action, ν(E) from the four states of vanadium.
// Why so      The left side rises steadily with E, so bisection cannot fail; nothing of the evaluation's Gran or derivative algebra is used.
// Valid for   equilibrium after every addition; activity coefficients inside the formal potentials. Protons follow dilution and reaction.
// Units       mL, mmol, mol/L, mV against the standard hydrogen electrode, K.
// Source      mass action and Nernst's law; potentials in couples.ts.
import type { VanadiumAmounts } from '../../electrolyte/mixStates.ts';
import { SPECIES, oxidationNumber } from '../../electrolyte/species.ts';
import { COUPLES, nernstSlope, type Couple, type Oxidant, type Titrant } from './couples.ts';

export interface SimulatedTitration {
  /** mmol in the beaker before anything is added */
  readonly vanadium: VanadiumAmounts;
  /** mmol of iron(II) in the beaker before the first addition */
  readonly iron: number;
  /** excess oxidant added before a back-titration, mmol of electrons; null without */
  readonly oxidant: { readonly kind: Oxidant; readonly electrons: number } | null;
  readonly titrant: Titrant;
  /** mol of electrons per litre */
  readonly normality: number;
  /** mL in the beaker before the first addition */
  readonly beakerVolume: number;
  /** mol/L H⁺ in the beaker before the first addition */
  readonly acid: number;
  /** K */
  readonly temperature: number;
  /** mL truly delivered at each reading */
  readonly volumes: readonly number[];
}

interface Redox {
  readonly couple: Couple;
  /** mmol of electrons that the wholly oxidised form can take */
  readonly capacity: number;
  readonly oxidisedAtStart: number;
}

/** mV against the hydrogen electrode at each volume. */
export function simulateTitration(setup: SimulatedTitration): number[] {
  const total = SPECIES.reduce((sum, species) => sum + setup.vanadium[species], 0);
  const oxidationAtStart = SPECIES.reduce(
    (sum, species) => sum + oxidationNumber(species) * setup.vanadium[species],
    0,
  );
  let released = 0;
  return setup.volumes.map((volume) => {
    const litres = (setup.beakerVolume + volume) / 1000;
    const others = redoxIn(setup, volume);
    const wanted = oxidationAtStart + others.reduce((sum, redox) => sum + redox.oxidisedAtStart, 0);
    const solve = (protons: number): number =>
      bisect(
        (E) =>
          total * meanOxidation(E, protons, setup.temperature) +
          others.reduce((sum, redox) => sum + oxidisedElectrons(redox, E, protons, litres, setup.temperature), 0) -
          wanted,
      );
    // Oxidation to V(IV) and V(V) sets protons free, oxidants take them up; one correction is enough, the effect is small.
    const protonsFor = (): number => Math.max(1e-3, (setup.acid * setup.beakerVolume + released) / 1000 / litres);
    const first = solve(protonsFor());
    released = protonsReleased(setup, first, others, protonsFor(), litres);
    return 1000 * solve(protonsFor());
  });
}

function redoxIn(setup: SimulatedTitration, volume: number): Redox[] {
  const delivered = setup.normality * volume;
  const capacity: Record<Titrant, number> = { permanganate: 0, cerium: 0, dichromate: 0, iron: setup.iron };
  const oxidised: Record<Titrant, number> = { permanganate: 0, cerium: 0, dichromate: 0, iron: 0 };
  capacity[setup.titrant] += delivered;
  if (setup.titrant !== 'iron') oxidised[setup.titrant] += delivered;
  if (setup.oxidant) {
    capacity[setup.oxidant.kind] += setup.oxidant.electrons;
    oxidised[setup.oxidant.kind] += setup.oxidant.electrons;
  }
  return (Object.keys(capacity) as Titrant[])
    .filter((kind) => capacity[kind] > 0)
    .map((kind) => ({ couple: COUPLES[kind], capacity: capacity[kind], oxidisedAtStart: oxidised[kind] }));
}

/** log10([ox]/[red]) of a couple at potential E, for one formula unit as the couple is written. */
const logRatio = (couple: Couple, E: number, protons: number, temperature: number): number =>
  (couple.electrons * 1000 * (E - couple.formalPotential)) / nernstSlope(temperature) -
  couple.protons * Math.log10(protons);

function statesAt(E: number, protons: number, temperature: number): number[] {
  const logs = [0];
  for (const pair of ['V2/V3', 'V3/V4', 'V4/V5'] as const)
    logs.push(logs.at(-1)! + logRatio(COUPLES[pair], E, protons, temperature));
  const top = Math.max(...logs);
  const weights = logs.map((log) => 10 ** (log - top));
  const sum = weights.reduce((a, b) => a + b, 0);
  return weights.map((weight) => weight / sum);
}

const meanOxidation = (E: number, protons: number, temperature: number): number =>
  statesAt(E, protons, temperature).reduce((sum, share, i) => sum + share * (i + 2), 0);

/** mmol of electrons that the oxidised part of a couple still can take. */
function oxidisedElectrons(redox: Redox, E: number, protons: number, litres: number, temperature: number): number {
  const { couple, capacity } = redox;
  const log = Math.min(300, Math.max(-300, logRatio(couple, E, protons, temperature)));
  if (couple !== COUPLES.dichromate) return capacity / (1 + 10 ** -log);
  // Cr₂O₇²⁻ ⇌ 2 Cr³⁺: y/(2(n − y))² = 10^log in mol/L; the smaller root of a quadratic, written without cancellation.
  const n = capacity / 6 / 1000 / litres;
  const k = 4 * 10 ** log;
  const y = (2 * k * n * n) / (2 * k * n + 1 + Math.sqrt(4 * k * n + 1));
  return y * litres * 1000 * 6;
}

/** mmol of H⁺ set free since the start. */
function protonsReleased(
  setup: SimulatedTitration,
  E: number,
  others: readonly Redox[],
  protons: number,
  litres: number,
): number {
  const oxygens = [0, 0, 1, 2];
  const total = SPECIES.reduce((sum, species) => sum + setup.vanadium[species], 0);
  const now = statesAt(E, protons, setup.temperature).reduce((sum, share, i) => sum + share * oxygens[i]!, 0) * total;
  const start = SPECIES.reduce((sum, species, i) => sum + setup.vanadium[species] * oxygens[i]!, 0);
  const taken = others.reduce((sum, redox) => {
    const reduced = redox.oxidisedAtStart - oxidisedElectrons(redox, E, protons, litres, setup.temperature);
    return sum + (reduced * redox.couple.protons) / redox.couple.electrons;
  }, 0);
  return 2 * (now - start) - taken;
}

/** Potential in V where a rising function crosses zero. */
function bisect(rising: (E: number) => number): number {
  let [low, high] = [-1.5, 2.5];
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2;
    if (rising(middle) > 0) high = middle;
    else low = middle;
  }
  return (low + high) / 2;
}
