import type { AssayState, Quantity } from '../assay/result.ts';
import type { Pair } from '../electrolyte/species.ts';
import type { Finding } from '../finding.ts';

/** One line of `tankhue/follow/1`. Fields may be added, never changed. */
export interface SeriesRecord {
  /** counted from 1 over the whole file */
  readonly row: number;
  /** bytes of the row's line in the file: where it begins, and where the next begins */
  readonly byte: readonly [number, number];
  /** byte of the line of wavelengths that holds for it */
  readonly axisAt: number;
  /** label columns of the file under their own names */
  readonly label: Readonly<Record<string, string | null>>;
  readonly state: AssayState;
  readonly pair: Pair;
  readonly stateOfCharge: Quantity;
  /** mol/L of the tank */
  readonly totalVanadium: Quantity;
  readonly match: number | null;
  /** row whose full assay the findings come from; null where only the fast screen has seen this one */
  readonly assayed: number | null;
  readonly findings: readonly Finding[];
}

/** Digits that no photometer has. */
const DIGITS = 7;

const number = (value: number | null): string => (value === null ? 'null' : String(Number(value.toPrecision(DIGITS))));
const quantity = ({ value, uncertainty }: Quantity): string =>
  `{"value":${number(value)},"uncertainty":${number(uncertainty)}}`;

/** Written out field by field: a general serialiser takes longer than everything else that happens to a row. */
export function seriesLine(record: SeriesRecord): string {
  const { row, byte, axisAt, label, state, pair, assayed } = record;
  return (
    `{"schema":"tankhue/follow/1","row":${row},"byte":[${byte[0]},${byte[1]}],"axisAt":${axisAt},` +
    `"label":${JSON.stringify(label)},"state":"${state}","pair":"${pair}",` +
    `"stateOfCharge":${quantity(record.stateOfCharge)},"totalVanadium":${quantity(record.totalVanadium)},` +
    `"match":${number(record.match)},"assayed":${assayed},"findings":${JSON.stringify(record.findings)}}\n`
  );
}
