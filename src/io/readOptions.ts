import type { DecimalMark } from './numberText.ts';

/** Decadic absorbance, a thousandth of it, transmittance in per cent, transmittance 0…1. */
export type OrdinateUnit = 'A' | 'mA' | '%T' | 'T';

export type AxisUnit = 'nm' | 'cm-1' | 'um';

export const SEPARATORS = ['tab', 'semicolon', 'comma', 'space'] as const;
export type Separator = (typeof SEPARATORS)[number];

/** `columns`: one axis, a spectrum in each further column. `pairs`: axis, values, axis, values. `rows`: the axis in the first row, a spectrum in each further row. */
export type Layout = 'columns' | 'pairs' | 'rows';

/** What a person says about a file where it does not say it itself; each decides over the file. */
export interface ReadOptions {
  readonly decimal?: DecimalMark;
  readonly unit?: OrdinateUnit;
  readonly axis?: AxisUnit;
  readonly layout?: Layout;
}
