import type { MeasuredProperty } from '../../assay/instrumentRecord.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';

// What is scanned to check a photometer: one interface a test, because each needs to know something else.

export const INSTRUMENT_TESTS = [
  'holmium',
  'dichromate-perchloric',
  'dichromate-sulfuric',
  'cut-off',
  'empty-cell',
  'filled-cell',
  'blank',
  'repeat',
  'toluene-hexane',
] as const;
export type InstrumentTestName = (typeof INSTRUMENT_TESTS)[number];

interface Scan {
  readonly spectrum: Spectrum;
  /** K, of the scan and of the certificate or published value it is compared with, where both are known */
  readonly temperatures?: { readonly scanned: number; readonly certified: number };
}

export interface HolmiumScan extends Scan {
  readonly test: 'holmium';
}

export interface DichromateScan extends Scan {
  readonly test: 'dichromate-perchloric' | 'dichromate-sulfuric';
  /** mg/L */
  readonly concentration: MeasuredProperty;
  /** cm */
  readonly pathLength: MeasuredProperty;
  readonly blank: Spectrum | null;
}

export interface CutOffScan extends Scan {
  readonly test: 'cut-off';
  readonly name: string;
  /** nm, where the filter or solution lets no light through */
  readonly opaque: readonly [number, number];
  /** least absorbance that is asked for */
  readonly least: number;
  readonly limitSource: string;
}

export interface EmptyCellScan extends Scan {
  readonly test: 'empty-cell';
  readonly cell: string;
  /** cm; 0 = unknown */
  readonly nominalPath: number;
  readonly refractiveIndex: number;
}

export interface FilledCellScan extends Scan {
  readonly test: 'filled-cell';
  readonly cell: string;
  /** the same solution in a cell of known path */
  readonly reference: Spectrum;
  /** cm */
  readonly referencePath: MeasuredProperty;
}

export interface BlankScan extends Scan {
  readonly test: 'blank';
  /** minutes since the first blank; NaN = unknown */
  readonly minutes: number;
}

/** One dark, clear sample scanned again and again without moving it: shows how noise grows with absorbance. */
export interface RepeatScan extends Scan {
  readonly test: 'repeat';
  /** scans of one name are compared with each other */
  readonly name: string;
}

export interface TolueneScan extends Scan {
  readonly test: 'toluene-hexane';
}

export type InstrumentScan =
  HolmiumScan | DichromateScan | CutOffScan | EmptyCellScan | FilledCellScan | BlankScan | RepeatScan | TolueneScan;

/** The scans of one test. */
export function scansOf<Name extends InstrumentScan['test']>(
  scans: readonly InstrumentScan[],
  ...names: readonly Name[]
): Extract<InstrumentScan, { test: Name }>[] {
  return scans.filter((scan): scan is Extract<InstrumentScan, { test: Name }> =>
    (names as readonly string[]).includes(scan.test),
  );
}
