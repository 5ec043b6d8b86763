import type { AxisUnit, OrdinateUnit } from './readOptions.ts';

const AXIS_SYMBOLS: ReadonlyArray<readonly [AxisUnit, RegExp]> = [
  ['cm-1', /(?:^|[^\p{L}])(?:1\/cm|cm\s*\^?\s*\(?[-−]\s*1\)?|cm⁻¹)/iu],
  ['nm', /(?:^|[^\p{L}])nm(?![\p{L}])|nanomet/iu],
  ['um', /(?:^|[^\p{L}])[uµμ]m(?![\p{L}])|micromet|microns?(?![\p{L}])/iu],
];
const AXIS_WORDS: ReadonlyArray<readonly [AxisUnit, RegExp]> = [
  ['cm-1', /wave\s?number|wellenzahl|nombre d'onde|número de onda|numero d'onda|波数/iu],
  [
    'nm',
    /wave\s?length|^wl$|wellenl|longueur d'onde|longitud de onda|lunghezza d'onda|comprimento de onda|golflengte|våglängd|длина волны|波长|波長|^λ$|^lambda$/iu,
  ],
];

/** The unit of an axis as a caption names it; a symbol beats a word. */
export function axisUnitOf(caption: string): AxisUnit | null {
  for (const [unit, pattern] of [...AXIS_SYMBOLS, ...AXIS_WORDS]) if (pattern.test(caption)) return unit;
  return null;
}

const PERCENT = /%\s*T(?![\p{L}])|(?:^|[^\p{L}])T\s*[([]?\s*%|transmi[^%\d]*%|%\s*transmi|per\s?cent\s*transmi/iu;
const MILLI = /(?:^|[^\p{L}])m(?:A|AU|Abs|OD|A\.U\.)(?![\p{L}])|milli-?\s?(?:abs|a\.?u)/u;
const TRANSMITTANCE = /transmi(?:tt|ss)|durchl[aä]ss/iu;
const ABSORBANCE = /absor(?!ptance)|extin[ck]t|(?:^|[^\p{L}])(?:abs|a\.u\.|au|od)(?![\p{L}])|optical density|吸光/iu;

/** The unit of values as a caption names it. A lone A or T is left out: it may be a sample's name. */
export function ordinateUnitOf(caption: string): OrdinateUnit | null {
  if (PERCENT.test(caption)) return '%T';
  if (MILLI.test(caption)) return 'mA';
  if (TRANSMITTANCE.test(caption) || /[([]\s*T\s*[)\]]/.test(caption)) return 'T';
  if (ABSORBANCE.test(caption) || /[([]\s*A\s*[)\]]/.test(caption)) return 'A';
  return null;
}

/** A caption that is nothing but A or T. */
export const bareUnitOf = (caption: string): OrdinateUnit | null =>
  caption === 'A' || caption === 'T' ? caption : null;

/**
 * Captions that name a unit and nothing else: the words a second header row holds. `Absorbance (A)` counts, `V2 10% Abs` does not.
 */
export function isUnitOnly(caption: string): boolean {
  const rest = caption
    .replace(
      /absorbance|absorption|transmittance|transmission|extinction|optical density|per\s?cent|milli|wave\s?(?:length|number)|(?:nano|micro)(?:meters?|metres?)/giu,
      '',
    )
    .replace(/abs|a\.u\.|au|od|nm|cm|%|[AmT\d\W_]/giu, '');
  return rest === '' && (axisUnitOf(caption) ?? ordinateUnitOf(caption) ?? bareUnitOf(caption)) !== null;
}

/** The value of a line of prose like `key: value`. */
const statedIn = (line: string): string => /[:=;,\t]\s*"?([^:=;,\t"]+)"?[;,\s]*$/.exec(line)?.[1]?.trim() ?? '';

/** A line of prose that states a unit and nothing else: `Y axis: %T`. */
export function statedOrdinateUnit(line: string): OrdinateUnit | null {
  const value = statedIn(line);
  return isUnitOnly(value) ? (ordinateUnitOf(value) ?? bareUnitOf(value)) : null;
}

/** A line of prose that states a unit and nothing else: `X axis: 1/cm`. */
export function statedAxisUnit(line: string): AxisUnit | null {
  const value = statedIn(line);
  return isUnitOnly(value) ? axisUnitOf(value) : null;
}
