import { TankhueError } from '../errors.ts';
import { requireAssociationConstant } from './boundConcentration.ts';
import { SPECIES, speciesOfPair, type Pair, type Species } from './species.ts';

/**
 * Something two or more ions form together and that absorbs beyond its parts. Which ones exist is data of a calibration.
 * With a constant above zero its amount is the bound concentration of mass action. A constant of zero is the weak limit, the
 * second-order law of older papers: amount = product of the total concentrations, spectrum = K × excess as one parameter.
 */
export interface Association {
  /** e.g. `V4·V5` */
  readonly name: string;
  readonly reactants: Partial<Readonly<Record<Species, number>>>;
  /** L/mol for two reactants; 0 for the weak limit */
  readonly associationConstant: number;
}

/** `V4+V5`, `2V5`: what a sheet or an option writes for the reactants. @throws TankhueError `unknown-association` */
export function parseAssociation(text: string, where: string): Association {
  const reactants: Partial<Record<Species, number>> = {};
  for (const part of text.split('+')) {
    const match = /^\s*([1-4]?)\s*(V[2-5])\s*$/i.exec(part);
    const species = SPECIES.find((candidate) => candidate === match?.[2]?.toUpperCase());
    if (!match || !species)
      throw new TankhueError(
        'unknown-association',
        `expected reactants such as V4+V5 or 2V5; received "${text}"`,
        where,
        'join the species that bind with +, a number in front for more than one',
      );
    reactants[species] = (reactants[species] ?? 0) + Number(match[1] || 1);
  }
  return { name: associationName(reactants), reactants, associationConstant: 0 };
}

/** `V4·V5`, `2V5`. */
export const associationName = (reactants: Association['reactants']): string =>
  SPECIES.filter((species) => reactants[species])
    .map((species) => `${reactants[species] === 1 ? '' : reactants[species]}${species}`)
    .join('·');

/** Reactant numbers of the lower and the higher species of a pair. @throws TankhueError `association-outside-pair` */
export function stoichiometryIn(pair: Pair, association: Association, where: string): readonly [number, number] {
  requireAssociationConstant(association.associationConstant, `${where}.associationConstant`);
  const [lower, higher] = speciesOfPair(pair);
  const outside = SPECIES.filter(
    (species) => association.reactants[species] && species !== lower && species !== higher,
  );
  if (outside.length > 0)
    throw new TankhueError(
      'association-outside-pair',
      `expected reactants among ${lower} and ${higher}; received ${outside.join(', ')}`,
      where,
      'give the association to the pair that holds its reactants',
    );
  return [association.reactants[lower] ?? 0, association.reactants[higher] ?? 0];
}
