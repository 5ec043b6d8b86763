import type { AssayState, Quantity } from '../assay/result.ts';
import { oxidationNumber, SPECIES, type Side, type Species } from '../electrolyte/species.ts';
import { millimetresFromCentimetres } from '../units.ts';
import { percentText } from './quantityText.ts';

/** `V(IV)` for a species, `V(IV)·V(V) complex` for `V4·V5`, `V(V) with itself` for `2V5`; other names as they are. */
export function absorberName(name: string): string {
  const species = (text: string): string => {
    const found = SPECIES.find((candidate) => candidate === text);
    return found ? romanNumeral(found) : text;
  };
  if (SPECIES.some((candidate) => candidate === name)) return species(name);
  const self = /^2(V[2-5])$/.exec(name);
  if (self) return `${species(self[1]!)} with itself`;
  return name.includes('·') ? `${name.split('·').map(species).join('·')} complex` : name;
}

export const romanNumeral = (species: Species): string =>
  `V(${['II', 'III', 'IV', 'V'][oxidationNumber(species) - 2]})`;

export const SIDE_WORD: Readonly<Record<Side, string>> = {
  negative: 'negative side',
  positive: 'positive side',
  composite: 'composite',
};

export const STATE_WORD: Readonly<Record<AssayState, string>> = {
  sound: 'sound',
  caution: 'use with caution',
  withheld: 'withheld',
};

/** A fraction as `52.65 ± 0.87 %`; `withheld` for null. */
export const percentWithUnit = ({ value, uncertainty }: Quantity): string =>
  value === null ? 'withheld' : `${percentText(value, uncertainty)} %`;

/** cm → `0.1 mm`, without the tail of a binary fraction */
export const pathText = (pathLength: number): string =>
  `${Number(millimetresFromCentimetres(pathLength).toPrecision(4))} mm`;

/** A name that is safe as part of an id and unique beside its index. */
export const idFrom = (prefix: string, index: number): string => `${prefix}-${index + 1}`;
