import { TankhueError, quoted } from '../errors.ts';

/** The four oxidation states, lowest first. V4 and V5 are totals: bound in a complex or not. */
export const SPECIES = ['V2', 'V3', 'V4', 'V5'] as const;
export type Species = (typeof SPECIES)[number];

/** Only neighbours coexist (log K 10…21 for every other mixture), so an electrolyte is one of three pairs. */
export const PAIRS = ['V2/V3', 'V3/V4', 'V4/V5'] as const;
export type Pair = (typeof PAIRS)[number];

export const SIDES = ['negative', 'positive', 'composite'] as const;
/** `composite`: both tanks mixed in one cuvette. */
export type Side = (typeof SIDES)[number];

/** Oxidation number of a species: 2…5. */
export const oxidationNumber = (species: Species): number => Number(species.slice(1));

/** The lower and the higher species of a pair. */
export const speciesOfPair = (pair: Pair): readonly [Species, Species] => pair.split('/') as [Species, Species];

/** The pair a healthy side holds. */
export const PAIR_OF_SIDE: Readonly<Record<Side, Pair>> = { negative: 'V2/V3', positive: 'V4/V5', composite: 'V3/V4' };

/**
 * State of charge of a side from its mean oxidation state ν: negative 3 − ν, positive ν − 4; outside 0…1 the side is
 * over-discharged and the number says so. A composite has none (NaN).
 */
export function stateOfChargeFromOxidationState(side: Side, averageOxidationState: number): number {
  if (side === 'negative') return 3 - averageOxidationState;
  if (side === 'positive') return averageOxidationState - 4;
  return NaN;
}

/** @throws TankhueError `unknown-side` */
export function parseSide(text: string, where: string): Side {
  const side = SIDES.find((candidate) => candidate === text.trim().toLowerCase());
  if (side) return side;
  throw new TankhueError(
    'unknown-side',
    `expected side to be negative, positive or composite; received ${quoted(text)}`,
    where,
    'write the tank the sample came from: negative, positive, or composite for both in one cuvette',
  );
}
