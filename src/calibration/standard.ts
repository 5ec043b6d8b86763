import { TankhueError } from '../errors.ts';
import { PAIRS, SPECIES, speciesOfPair, type Pair, type Species } from '../electrolyte/species.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';

/** A cuvette of known composition. */
export interface Standard {
  readonly name: string;
  /** blank already subtracted */
  readonly spectrum: Spectrum;
  /** cm */
  readonly pathLength: number;
  /** cm; null where nobody said */
  readonly pathUncertainty: number | null;
  /** ≥ 1 */
  readonly dilution: number;
  /** K; null where nobody said */
  readonly temperature: number | null;
  /** mol/L of the undiluted electrolyte; V4 and V5 are totals */
  readonly concentration: Readonly<Record<Species, number>>;
  /** mol/L, of each concentration; null where nobody said */
  readonly concentrationUncertainty: number | null;
  /** standards from one stock carry one name here; null where nobody said */
  readonly preparation: string | null;
  readonly role: 'calibration' | 'check';
}

export const totalVanadiumOf = (standard: Standard): number =>
  SPECIES.reduce((sum, species) => sum + standard.concentration[species], 0);

/** Share of the higher species of a pair. */
export function higherShare(standard: Standard, pair: Pair): number {
  const [lower, higher] = speciesOfPair(pair);
  const { concentration } = standard;
  return concentration[higher] / (concentration[lower] + concentration[higher]);
}

const present = (standard: Standard): Species[] => SPECIES.filter((species) => standard.concentration[species] > 0);

/**
 * The pairs a standard can serve: one for a mixture, one or two for a pure state.
 * @throws TankhueError `cannot-coexist`, `no-vanadium`
 */
export function pairsHolding(standard: Standard): Pair[] {
  const species = present(standard);
  const pairs = PAIRS.filter((pair) => species.every((one) => speciesOfPair(pair).includes(one)));
  if (species.length > 0 && pairs.length > 0) return pairs;
  if (species.length === 0)
    throw new TankhueError(
      'no-vanadium',
      'expected a concentration above 0 mol/L in one of V2_mol_L … V5_mol_L; received none',
      `standard ${standard.name}`,
      'a vial of acid is a blank, not a standard: name it in blank_file',
    );
  throw new TankhueError(
    'cannot-coexist',
    `expected one state or two neighbours; received ${species.join(' and ')}`,
    `standard ${standard.name}`,
    'states two steps apart react with each other: write what is left after the reaction',
  );
}

/**
 * Deals standards to pairs. A pure state belongs to the pair of the mixtures it was measured beside (same preparation, else same file);
 * without such it serves every pair that can hold it.
 */
export function dealToPairs(standards: readonly Standard[]): Map<Pair, Standard[]> {
  const family = (standard: Standard): string => standard.preparation ?? standard.spectrum.origin.file;
  const home = new Map<string, Set<Pair>>();
  for (const standard of standards) {
    const pairs = pairsHolding(standard);
    if (present(standard).length === 2)
      home.set(family(standard), (home.get(family(standard)) ?? new Set()).add(pairs[0]!));
  }
  const dealt = new Map<Pair, Standard[]>(PAIRS.map((pair) => [pair, []]));
  for (const standard of standards) {
    const possible = pairsHolding(standard);
    const beside = possible.filter((pair) => home.get(family(standard))?.has(pair));
    for (const pair of beside.length > 0 ? beside : possible) dealt.get(pair)!.push(standard);
  }
  return dealt;
}
