import type { SpectrumOrigin } from '../../spectrum/spectrum.ts';

/** One line of a check standard's log. */
export interface CheckPoint {
  /** as written on the sheet */
  readonly at: string;
  /** hours since the first line; only order and gaps are read from it */
  readonly hours: number;
  /** bottle or batch of the check standard */
  readonly lot: string;
  /** in the log's unit; NaN = not measured, and it stays so */
  readonly value: number;
  /** what the lot is stated to hold, in the log's unit; NaN where nobody said */
  readonly assigned: number;
  /** whether the line belongs to the baseline period; null where the sheet does not say */
  readonly inBaseline: boolean | null;
  /** fitted systematic effects by name, each in a unit of its own; NaN where empty */
  readonly modes: Readonly<Record<string, number>>;
}

export interface CheckLog {
  /** what is charted, e.g. `state of charge` */
  readonly quantity: string;
  /** of value and assigned; empty for a plain number */
  readonly unit: string;
  /** in time order */
  readonly points: readonly CheckPoint[];
  readonly modeNames: readonly string[];
  /** whether the lines of the file stood in another order */
  readonly wasReordered: boolean;
  readonly origin: SpectrumOrigin;
}
