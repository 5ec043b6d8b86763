import { TankhueError, quoted } from '../errors.ts';
import { pairAround } from './mixStates.ts';
import { oxidationNumber, PAIR_OF_SIDE, SIDES, SPECIES, speciesOfPair, type Side, type Species } from './species.ts';

/** mol/L of a tank or cuvette; states that are not there are left out. V4 and V5 are totals. */
export type Composition = Partial<Readonly<Record<Species, number>>>;

/** `V4=0.8,V5=0.8`, in mol/L. @throws TankhueError `composition-unclear` */
export function parseComposition(text: string, where: string): Composition {
  const composition: Partial<Record<Species, number>> = {};
  for (const part of text.split(',')) {
    const match = /^\s*(V[2-5])\s*=\s*(\d+\.?\d*(?:e[+-]?\d+)?|\.\d+)\s*(?:mol\/L|M)?\s*$/i.exec(part);
    const species = SPECIES.find((candidate) => candidate === match?.[1]?.toUpperCase());
    if (!match || !species || composition[species] !== undefined)
      throw new TankhueError(
        'composition-unclear',
        `expected each state once with its mol/L; received ${quoted(text)}`,
        where,
        'write V4=0.8,V5=0.8',
      );
    composition[species] = Number(match[2]);
  }
  return composition;
}

/** Composition of a side of given total (mol/L) and state of charge; outside 0…1 it holds the neighbouring pair. @throws TankhueError `no-state-of-charge` */
export function compositionAt(side: Side, total: number, stateOfCharge: number): Composition {
  if (side === 'composite')
    throw new TankhueError(
      'no-state-of-charge',
      'expected the negative or the positive side; received composite',
      '--side',
      'a composite has no state of charge: state its composition',
    );
  const averageOxidationState = side === 'negative' ? 3 - stateOfCharge : 4 + stateOfCharge;
  const [lower, higher] = speciesOfPair(pairAround(averageOxidationState));
  const higherShare = averageOxidationState - oxidationNumber(lower);
  return { [lower]: total * (1 - higherShare), [higher]: total * higherShare };
}

/** The side whose pair holds all the states that are there. */
export function sideHolding(composition: Composition): Side {
  const present = SPECIES.filter((species) => (composition[species] ?? 0) > 0);
  return SIDES.find((side) => present.every((one) => speciesOfPair(PAIR_OF_SIDE[side]).includes(one))) ?? 'composite';
}
