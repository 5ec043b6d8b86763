import type { DecimalMark } from './numberText.ts';

export const ORDINATE_UNITS = ['A', 'mA', '%T', 'T'] as const;
/** Decadic absorbance, a thousandth of it, transmittance in per cent, transmittance 0…1. */
export type OrdinateUnit = (typeof ORDINATE_UNITS)[number];

export const AXIS_UNITS = ['nm', 'cm-1', 'um'] as const;
export type AxisUnit = (typeof AXIS_UNITS)[number];

export const SEPARATORS = ['tab', 'semicolon', 'comma', 'space'] as const;
export type Separator = (typeof SEPARATORS)[number];

/** `columns`: one axis, a spectrum in each further column. `pairs`: axis, values, axis, values. `rows`: the axis in the first row, a spectrum in each further row. */
export type Layout = 'columns' | 'pairs' | 'rows';

/** What a person says about a file where it does not say it itself; each decides over the file. */
export interface ReadOptions {
  readonly decimal?: DecimalMark | undefined;
  readonly unit?: OrdinateUnit | undefined;
  readonly axis?: AxisUnit | undefined;
  readonly separator?: Separator | undefined;
  readonly layout?: Layout | undefined;
}
