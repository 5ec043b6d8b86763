import type { Finding } from '../finding.ts';
import type { CalibrationInUse } from '../assay/assaySample.ts';
import type { AssayState } from '../assay/result.ts';
import type { AssayOptions } from '../assay/sample.ts';
import { seriesAssay, type SeriesAssay, type SeriesResult } from '../assay/seriesAssay.ts';
import type { SeriesCuvette } from '../assay/seriesScreen.ts';
import type { Pair } from '../electrolyte/species.ts';
import { TankhueError } from '../errors.ts';
import { jsonRow, type WrittenAxis } from '../io/ndjsonRows.ts';
import { wideRows, type WideLayout } from '../io/wideRows.ts';
import type { OrdinateUnit } from '../io/readOptions.ts';
import { toAbsorbance } from '../io/spectrumFromPoints.ts';

// What a worker does with a piece of a file. Imports go to the single files, not to the public API: each worker holds its own copy of
// what it imports, and it needs neither reports nor sheets.

/** What all pieces of one run share. */
export interface SeriesJob {
  readonly inUse: CalibrationInUse;
  readonly cuvette: SeriesCuvette;
  readonly options: AssayOptions;
  readonly unit: OrdinateUnit;
}

/** Whole lines, and how to read them. */
export interface SeriesPiece {
  readonly bytes: Uint8Array;
  readonly layout:
    { readonly kind: 'wide'; readonly wide: WideLayout } | { readonly kind: 'ndjson'; readonly axis: WrittenAxis };
}

/** What a full assay said, valid for all rows that point to it. */
export interface Diagnosis {
  readonly state: AssayState;
  readonly pair: Pair;
  readonly findings: readonly Finding[];
}

/** Results of a piece, columns in arrays that move between threads without being copied. NaN where a number is withheld. */
export interface SeriesPieceResults {
  readonly count: number;
  /** bytes from the start of the piece */
  readonly start: Float64Array;
  readonly end: Float64Array;
  readonly labels: readonly (readonly (string | null)[])[];
  readonly stateOfCharge: Float64Array;
  readonly uncertainty: Float64Array;
  readonly total: Float64Array;
  readonly totalUncertainty: Float64Array;
  readonly match: Float64Array;
  /** index into `diagnoses` */
  readonly diagnosis: Int32Array;
  readonly diagnoses: readonly Diagnosis[];
  /** rows since the full assay that the diagnosis comes from; −1 where it is the screen's */
  readonly assayedBefore: Int32Array;
  /** index into `axes`, each in words */
  readonly axis: Int32Array;
  readonly axes: readonly string[];
  /** a new line of wavelengths, at which reading stopped */
  readonly header: number | null;
}

export const axisInWords = (wavelength: Float64Array): string =>
  `${wavelength[0]} to ${wavelength[wavelength.length - 1]} nm, ${wavelength.length} points`;

/** A reader of pieces; what it prepared for an axis it keeps. */
export function seriesReader(job: SeriesJob): (piece: SeriesPiece) => SeriesPieceResults {
  const assays = new Map<string, SeriesAssay>();
  const assayOn = (wavelength: Float64Array): SeriesAssay => {
    const key = wavelength.join();
    const known = assays.get(key);
    if (known) return known;
    if (assays.size >= 4) assays.delete(assays.keys().next().value!);
    const made = seriesAssay(job.inUse, job.cuvette, wavelength, job.options);
    assays.set(key, made);
    return made;
  };
  return (piece) => {
    for (const assay of assays.values()) assay.begin();
    return piece.layout.kind === 'wide'
      ? wideResults(piece.bytes, piece.layout.wide, job, assayOn)
      : jsonResults(piece.bytes, piece.layout.axis, job, assayOn);
  };
}

function wideResults(
  bytes: Uint8Array,
  layout: WideLayout,
  job: SeriesJob,
  assayOn: (wavelength: Float64Array) => SeriesAssay,
): SeriesPieceResults {
  const rows = wideRows(bytes, layout);
  inAbsorbance(rows.readings, job.unit);
  const assay = assayOn(layout.wavelength);
  const found: SeriesResult[] = [];
  for (let row = 0; row < rows.count; row++)
    found.push(
      rows.wrongCells[row]! > 0
        ? unreadable(
            job,
            'row-incomplete',
            `expected ${layout.labels.length + layout.wavelength.length} cells; received ${rows.wrongCells[row]}`,
            'the writing was cut off, or the separator changed; the row is left out',
          )
        : assay.assay(rows.readings, row),
    );
  const axis = new Int32Array(rows.count);
  const { count, start, end, labels, header } = rows;
  return { ...columnsOf(found), count, start, end, labels, header, axis, axes: [axisInWords(layout.wavelength)] };
}

function jsonResults(
  bytes: Uint8Array,
  axis: WrittenAxis,
  job: SeriesJob,
  assayOn: (wavelength: Float64Array) => SeriesAssay,
): SeriesPieceResults {
  const decoder = new TextDecoder();
  const found: SeriesResult[] = [];
  const labels: (string | null)[][] = [];
  const [start, end, axisIndex]: [number[], number[], number[]] = [[], [], []];
  const axes: string[] = [axisInWords(axis.wavelength)];
  for (let position = 0; position < bytes.length;) {
    const lineEnd = bytes.indexOf(10, position);
    const next = lineEnd < 0 ? bytes.length : lineEnd + 1;
    const line = decoder.decode(bytes.subarray(position, next)).trim();
    if (line !== '') {
      let words = axes[0]!;
      let own: (string | null)[] = [null, null];
      try {
        const row = jsonRow(line, axis, '');
        words = axisInWords(row.wavelength);
        own = [row.sample, row.time];
        inAbsorbance(row.absorbance, job.unit);
        found.push(assayOn(row.wavelength).assay(row.absorbance, 0));
      } catch (error) {
        if (!(error instanceof TankhueError)) throw error;
        found.push(unreadable(job, error.code, error.message, error.hint));
      }
      if (!axes.includes(words)) axes.push(words);
      axisIndex.push(axes.indexOf(words));
      labels.push(own);
      start.push(position);
      end.push(next);
    }
    position = next;
  }
  return {
    ...columnsOf(found),
    count: found.length,
    start: Float64Array.from(start),
    end: Float64Array.from(end),
    labels,
    axis: Int32Array.from(axisIndex),
    axes,
    header: null,
  };
}

function inAbsorbance(readings: Float64Array, unit: OrdinateUnit): void {
  if (unit === 'A') return;
  const convert = toAbsorbance(unit);
  for (let i = 0; i < readings.length; i++) readings[i] = convert(readings[i]!);
}

const NOTHING = { value: null, uncertainty: null };

const unreadable = (job: SeriesJob, code: string, message: string, hint: string): SeriesResult => ({
  state: 'withheld',
  pair: job.cuvette.side === 'negative' ? 'V2/V3' : 'V4/V5',
  stateOfCharge: NOTHING,
  totalVanadium: NOTHING,
  match: null,
  findings: [{ code, severity: 'withhold', message, hint }],
  assayedBefore: 0,
});

function columnsOf(
  found: readonly SeriesResult[],
): Omit<SeriesPieceResults, 'count' | 'start' | 'end' | 'labels' | 'header' | 'axis' | 'axes'> {
  const column = (of: (one: SeriesResult) => number | null): Float64Array =>
    Float64Array.from(found, (one) => of(one) ?? NaN);
  const diagnoses: Diagnosis[] = [];
  const index = new Map<readonly Finding[], number>();
  const diagnosis = Int32Array.from(found, ({ state, pair, findings }) => {
    if (!index.has(findings)) index.set(findings, diagnoses.push({ state, pair, findings }) - 1);
    return index.get(findings)!;
  });
  return {
    stateOfCharge: column((one) => one.stateOfCharge.value),
    uncertainty: column((one) => one.stateOfCharge.uncertainty),
    total: column((one) => one.totalVanadium.value),
    totalUncertainty: column((one) => one.totalVanadium.uncertainty),
    match: column((one) => one.match),
    diagnosis,
    diagnoses,
    assayedBefore: Int32Array.from(found, (one) => one.assayedBefore ?? -1),
  };
}
