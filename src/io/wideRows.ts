// What        Spectra written one a line under a line of wavelengths, read from bytes in pieces.
// Equation    –
// Why so      A flow cell writes for weeks: the file is never held whole, never turned into strings, and each row knows the bytes it came
//             from, so that a reader can stop anywhere and go on.
// Valid for   UTF-8, Latin-1; comma, semicolon or tab; decimal point, or decimal comma where the separator is another sign; label columns
//             (time, sample) before the readings.
// Units       nm; readings as written.
// Source      ours.
import { TankhueError, quoted } from '../errors.ts';
import { numberFromBytes } from './numberBytes.ts';

/** A line of wavelengths, understood. */
export interface WideLayout {
  readonly separator: ',' | ';' | '\t';
  /** names of the columns before the readings */
  readonly labels: readonly string[];
  /** nm, ascending */
  readonly wavelength: Float64Array;
  /** the file writes them descending */
  readonly descending: boolean;
  /** columns behind the readings, which are not read */
  readonly trailing: number;
}

/** Rows of one piece of a file. */
export interface WideRows {
  readonly count: number;
  /** count × wavelengths, ascending; NaN where a cell holds no number, all NaN in a row that is not whole */
  readonly readings: Float64Array;
  /** label cells of each row */
  readonly labels: readonly (readonly string[])[];
  /** bytes from the start of the piece: where each row begins, and where the next line does */
  readonly start: Float64Array;
  readonly end: Float64Array;
  /** cells found in a row that is not whole, else 0 */
  readonly wrongCells: Int32Array;
  /** where a new line of wavelengths begins, at which reading stopped; null where there is none */
  readonly header: number | null;
}

const FEWEST = 5;
const [NEWLINE, RETURN, HASH, QUOTE] = [10, 13, 35, 34];
const SHORTEST = 150;
const LONGEST = 3500;

const cellsOf = (line: string, separator: string): string[] =>
  line.split(separator).map((cell) => cell.trim().replace(/^"(.*)"$/, '$1'));

const wavelengthIn = (cell: string, separator: string): number => {
  const match = /^(\d+(?:[.,]\d+)?)\s*(?:nm)?$/i.exec(cell);
  if (!match || (separator === ',' && match[1]!.includes(','))) return NaN;
  return Number(match[1]!.replace(',', '.'));
};

/** The layout that a line of wavelengths announces; null where the line is none. */
export function wideHeader(line: string): WideLayout | null {
  for (const separator of ['\t', ';', ','] as const) {
    const cells = cellsOf(line, separator);
    const values = cells.map((cell) => wavelengthIn(cell, separator));
    const isWavelength = (value: number): boolean => value >= SHORTEST && value <= LONGEST;
    const first = values.findIndex(isWavelength);
    if (first < 0) continue;
    let last = first;
    while (last + 1 < values.length && isWavelength(values[last + 1]!)) last++;
    const axis = values.slice(first, last + 1);
    const descending = axis[1]! < axis[0]!;
    const rises = (i: number): boolean => i === 0 || (descending ? axis[i]! < axis[i - 1]! : axis[i]! > axis[i - 1]!);
    if (axis.length < FEWEST || !axis.every((_, i) => rises(i))) continue;
    return {
      separator,
      labels: cells.slice(0, first),
      wavelength: Float64Array.from(descending ? axis.reverse() : axis),
      descending,
      trailing: cells.length - last - 1,
    };
  }
  return null;
}

/** The refusal of a file that has no such line. */
export const noWavelengths = (line: string | undefined, where: string): TankhueError =>
  new TankhueError(
    'no-wavelengths',
    `expected a line of ${FEWEST} wavelengths or more (nm), one spectrum a line below it; received ${quoted(line ?? 'nothing')}`,
    where,
    'spectra in columns are read by assay; for a series write one line a spectrum under a line of wavelengths',
  );

/**
 * @param bytes whole lines only: the last byte is a line end
 * @param layout of the line of wavelengths above them
 */
export function wideRows(bytes: Uint8Array, layout: WideLayout): WideRows {
  const columns = layout.wavelength.length;
  const labelCount = layout.labels.length;
  const separator = layout.separator.charCodeAt(0);
  const decoder = new TextDecoder();
  const firstLabel = labelCount > 0 ? layout.labels[0]! : null;
  let readings = new Float64Array(columns * Math.max(4, Math.ceil(bytes.length / (6 * columns))));
  const labels: string[][] = [];
  const start: number[] = [];
  const end: number[] = [];
  const wrongCells: number[] = [];
  let header: number | null = null;
  let position = 0;
  while (position < bytes.length && header === null) {
    let lineEnd = bytes.indexOf(NEWLINE, position);
    if (lineEnd < 0) lineEnd = bytes.length;
    const next = Math.min(bytes.length, lineEnd + 1);
    const stop = lineEnd > position && bytes[lineEnd - 1] === RETURN ? lineEnd - 1 : lineEnd;
    if (stop > position && bytes[position] !== HASH) {
      const row = start.length;
      if ((row + 1) * columns > readings.length) readings = grown(readings);
      const own: string[] = [];
      let i = position;
      while (own.length < labelCount && i <= stop) {
        const cell = cellEnd(bytes, i, stop, separator);
        own.push(textOf(decoder, bytes, i, cell));
        i = cell + 1;
      }
      const offset = row * columns;
      let cells = 0;
      while (i <= stop) {
        let cell = i;
        while (cell < stop && bytes[cell] !== separator) cell++;
        if (cells < columns)
          readings[offset + (layout.descending ? columns - 1 - cells : cells)] = numberFromBytes(bytes, i, cell);
        cells++;
        i = cell + 1;
      }
      const whole = own.length === labelCount && (cells === columns + layout.trailing || cells === columns);
      const suspicious = !whole || readings[offset]! >= SHORTEST || (firstLabel !== null && own[0] === firstLabel);
      if (suspicious && wideHeader(decoder.decode(bytes.subarray(position, stop)))) header = position;
      else {
        if (!whole) readings.fill(NaN, offset, offset + columns);
        labels.push(own);
        start.push(position);
        end.push(next);
        wrongCells.push(whole ? 0 : own.length + cells);
      }
    }
    position = next;
  }
  const count = start.length;
  return {
    count,
    readings: readings.subarray(0, count * columns),
    labels,
    start: Float64Array.from(start),
    end: Float64Array.from(end),
    wrongCells: Int32Array.from(wrongCells),
    header,
  };
}

function grown(readings: Float64Array): Float64Array<ArrayBuffer> {
  const larger = new Float64Array(2 * readings.length);
  larger.set(readings);
  return larger;
}

/** A label may be quoted, with separators inside. */
function cellEnd(bytes: Uint8Array, from: number, stop: number, separator: number): number {
  let i = from;
  if (bytes[i] === QUOTE) {
    i++;
    while (i < stop && bytes[i] !== QUOTE) i++;
  }
  while (i < stop && bytes[i] !== separator) i++;
  return i;
}

const textOf = (decoder: TextDecoder, bytes: Uint8Array, from: number, to: number): string =>
  decoder
    .decode(bytes.subarray(from, to))
    .trim()
    .replace(/^"(.*)"$/, '$1');
