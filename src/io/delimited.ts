import { TankhueError, quoted } from '../errors.ts';
import { makeSpectrum, type Spectrum } from '../spectrum/spectrum.ts';
import {
  cellsOf,
  decideDialect,
  isOverRange,
  numberIn,
  SEPARATOR_NAMES,
  type DecimalMark,
  type Dialect,
} from './dialect.ts';
import {
  axisUnitIn,
  axisUnitOf,
  ordinateUnitIn,
  ordinateUnitOf,
  toAbsorbance,
  toNanometres,
  type AxisUnit,
  type OrdinateUnit,
} from './units.ts';

/** What decides where a file can be read in two ways. */
export interface ReadOptions {
  readonly decimal?: DecimalMark;
  readonly unit?: OrdinateUnit;
  readonly axis?: AxisUnit;
}

/** What the reader understood, so that a person can see a misreading at once. */
export interface Understood {
  readonly format: string;
  readonly layout: string;
  readonly separator: string;
  readonly decimal: string;
  readonly headerLines: number;
  readonly footerLines: number;
  readonly points: number;
  /** nm */
  readonly range: readonly [number, number];
  /** nm, median */
  readonly step: number;
  readonly direction: 'ascending' | 'descending';
  readonly axis: AxisUnit;
  readonly units: readonly OrdinateUnit[];
  readonly columns: readonly string[];
  /** cells that carried an over-range mark, a transmittance of 0 or below, or nothing */
  readonly withoutValue: number;
}

export interface SpectraRead {
  readonly spectra: readonly Spectrum[];
  readonly understood: Understood;
}

const SAMPLE_LINES = 400;

/** @throws TankhueError in the grammar of the house for everything that cannot be read in one way only */
export function parseDelimited(
  lines: Iterable<string>,
  fileName: string,
  sha256: string,
  options: ReadOptions,
): SpectraRead {
  const iterator = lines[Symbol.iterator]();
  const sample: string[] = [];
  for (let next = iterator.next(); !next.done; next = iterator.next()) {
    sample.push(next.value);
    if (sample.length >= SAMPLE_LINES) break;
  }
  const rest: Iterable<string> = { [Symbol.iterator]: () => iterator };
  const transposed = rowsLayout(sample, options);
  if (transposed) return parseRows(sample, rest, transposed, fileName, sha256, options);
  const dialect = decideDialect(sample, fileName, options.decimal);
  return parseColumns(sample, rest, dialect, fileName, sha256, options);
}

interface Table {
  /** one array a column */
  readonly columns: number[][];
  /** line number of each row, from 1 */
  readonly lineOf: number[];
  readonly footerLines: number;
  readonly withoutValue: number;
}

function collect(sample: readonly string[], rest: Iterable<string>, dialect: Dialect, fileName: string): Table {
  const columns: number[][] = Array.from({ length: dialect.width }, () => []);
  const lineOf: number[] = [];
  let footerLines = 0;
  let withoutValue = 0;
  let number = dialect.first;
  const take = (line: string): void => {
    number += 1;
    if (line.trim() === '') return;
    const cells = cellsOf(line, dialect.separator, dialect.decimal);
    const values = cells.map((cell) => numberIn(cell, dialect.decimal));
    if (values[0] === null || !Number.isFinite(values[0]) || values.every((value, j) => j === 0 || value === null)) {
      footerLines += 1;
      return;
    }
    if (footerLines > 0 || cells.length > dialect.width || values.includes(null)) {
      const column = Math.max(0, values.indexOf(null));
      throw new TankhueError(
        footerLines > 0 ? 'numbers-again' : 'not-a-number',
        footerLines > 0
          ? `expected one block of numbers; received numbers again after ${footerLines} lines of text`
          : `expected ${dialect.width} numbers; received ${cells.length > dialect.width ? `${cells.length} cells` : quoted(cells[column]!)}`,
        `${fileName}:${number}:${column + 1}`,
        footerLines > 0 ? 'split the file, one block in each' : 'mend the line, or export the file again',
      );
    }
    for (let j = 0; j < dialect.width; j++) {
      const value = values[j] ?? NaN;
      if (j > 0 && Number.isNaN(value)) withoutValue += 1;
      columns[j]!.push(value);
    }
    lineOf.push(number);
  };
  for (const line of sample.slice(dialect.first)) take(line);
  for (const line of rest) take(line);
  return { columns, lineOf, footerLines, withoutValue };
}

function parseColumns(
  sample: readonly string[],
  rest: Iterable<string>,
  dialect: Dialect,
  fileName: string,
  sha256: string,
  options: ReadOptions,
): SpectraRead {
  const table = collect(sample, rest, dialect, fileName);
  const header = headerOf(sample, dialect);
  const pairs = isPairLayout(table, header.names);
  const xColumns = pairs ? [...table.columns.keys()].filter((j) => j % 2 === 0) : [0];
  const ySpans = pairs
    ? xColumns.map((x) => [x, x + 1] as const)
    : [...table.columns.keys()].slice(1).map((y) => [0, y] as const);
  const units: OrdinateUnit[] = [];
  let withoutValue = table.withoutValue;
  let axis: AxisUnit = 'nm';
  let direction: Understood['direction'] = 'ascending';
  const spectra = ySpans.map(([x, y]) => {
    const name = nameOf(header.names, x, y, pairs);
    const curve = orderedCurve(table, x, y, fileName);
    direction = curve.direction;
    axis =
      options.axis ??
      axisUnitIn(header.names[x] ?? '') ??
      axisUnitIn(header.prose) ??
      axisUnitOf(curve.x, `${fileName}:${table.lineOf[0]}:${x + 1}`);
    const unit =
      options.unit ??
      ordinateUnitIn(header.units[y] ?? '') ??
      ordinateUnitIn(header.names[y] ?? '') ??
      ordinateUnitIn(header.prose) ??
      ordinateUnitOf(curve.y, `${fileName}:${table.lineOf[0]}:${y + 1}`);
    units.push(unit);
    const read = spectrumOf(name, curve, axis, unit, { file: fileName, column: name, sha256 });
    withoutValue += read.lost;
    return read.spectrum;
  });
  return {
    spectra,
    understood: understood(spectra, {
      layout: pairs ? 'pairs of wavelength and reading' : 'one wavelength column',
      separator: SEPARATOR_NAMES[dialect.separator],
      decimal: dialect.decimal,
      headerLines: dialect.first,
      footerLines: table.footerLines,
      direction,
      axis,
      units: [...new Set(units)],
      withoutValue,
    }),
  };
}

interface Header {
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly prose: string;
}

/** The nearest line above the numbers with a name for each column; a line of units between is taken as such. */
function headerOf(sample: readonly string[], dialect: Dialect): Header {
  const above = sample.slice(0, dialect.first).filter((line) => line.trim() !== '');
  const prose = above.join('\n');
  const cells = (line: string | undefined): string[] =>
    line === undefined ? [] : cellsOf(line, dialect.separator, 'point').map((cell) => cell.trim());
  const fits = (row: readonly string[]): boolean =>
    row.length >= Math.min(2, dialect.width) && row.length <= dialect.width + 1;
  const nearest = cells(above.at(-1));
  if (!fits(nearest)) return { names: [], units: [], prose };
  const onlyUnits = nearest.every(
    (cell) => cell === '' || /^[([]?\s*(nm|cm-1|cm⁻¹|1\/cm|A|mA|abs|a\.?u\.?|%\s*T|T|%)\s*[)\]]?$/i.test(cell),
  );
  const before = cells(above.at(-2));
  if (onlyUnits && before.length >= 2) return { names: before, units: nearest, prose };
  return { names: nearest, units: [], prose: above.join('\n') };
}

function nameOf(names: readonly string[], x: number, y: number, pairs: boolean): string {
  const own = names[y] ?? '';
  if (!pairs) return own || `column ${y}`;
  const generic = own === '' || ordinateUnitIn(own) !== null;
  const beside = names[x] ?? '';
  if (generic && beside !== '' && axisUnitIn(beside) === null) return beside;
  return generic ? `pair ${x / 2 + 1}` : own;
}

/** Every second column an axis: named so in the header, or monotonic with the range and about the step of the first. */
function isPairLayout(table: Table, names: readonly string[]): boolean {
  const { columns } = table;
  if (columns.length < 4 || columns.length % 2 === 1) return false;
  const even = [...columns.keys()].filter((j) => j % 2 === 0);
  if (even.every((j) => axisUnitIn(names[j] ?? '') !== null)) return true;
  const first = columns[0]!;
  const span = Math.abs(first.at(-1)! - first[0]!);
  return even.slice(1).every((j) => {
    const column = columns[j]!.filter(Number.isFinite);
    const rises = column.every((value, i) => i === 0 || value > column[i - 1]!);
    const falls = column.every((value, i) => i === 0 || value < column[i - 1]!);
    return (
      column.length > 1 &&
      (rises || falls) &&
      Math.abs(column[0]!) >= 150 &&
      Math.abs(column.at(-1)! - column[0]!) > span / 4
    );
  });
}

interface Curve {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly direction: Understood['direction'];
}

/** Points in rising order. @throws TankhueError `axis-turns`, `wavelength-repeats`, `points-missing` */
function orderedCurve(table: Table, xColumn: number, yColumn: number, fileName: string): Curve {
  const rows = [...table.lineOf.keys()].filter((i) => Number.isFinite(table.columns[xColumn]![i]));
  if (rows.length < 2)
    throw new TankhueError(
      'points-missing',
      `expected two points or more; received ${rows.length}`,
      `${fileName}:${table.lineOf[0] ?? 1}`,
      'scan from the violet to the near infrared',
    );
  const at = (row: number): number => table.columns[xColumn]![row]!;
  const falling = at(rows[1]!) < at(rows[0]!);
  for (let i = 1; i < rows.length; i++) {
    const step = at(rows[i]!) - at(rows[i - 1]!);
    if (step !== 0 && step < 0 === falling) continue;
    throw new TankhueError(
      step === 0 ? 'wavelength-repeats' : 'axis-turns',
      step === 0
        ? `expected each wavelength once; received ${at(rows[i]!)} twice`
        : `expected wavelengths that only rise or only fall; received ${at(rows[i - 2] ?? rows[i - 1]!)}, ${at(rows[i - 1]!)}, ${at(rows[i]!)}`,
      `${fileName}:${table.lineOf[rows[i]!]}:${xColumn + 1}`,
      'sort the points, or give the two scans as two files',
    );
  }
  const order = falling ? rows.toReversed() : rows;
  return {
    x: Float64Array.from(order, at),
    y: Float64Array.from(order, (row) => table.columns[yColumn]![row]!),
    direction: falling ? 'descending' : 'ascending',
  };
}

/** @throws TankhueError `no-values` */
export function spectrumOf(
  name: string,
  curve: Pick<Curve, 'x' | 'y'>,
  axis: AxisUnit,
  unit: OrdinateUnit,
  origin: Spectrum['origin'],
): { spectrum: Spectrum; lost: number } {
  const x = curve.x.map(toNanometres(axis));
  const y = curve.y.map(toAbsorbance(unit));
  if (axis === 'cm-1') {
    x.reverse();
    y.reverse();
  }
  if (!y.some(Number.isFinite))
    throw new TankhueError(
      'no-values',
      `expected readings; received none in ${y.length} points (over-range marks, empty cells, or a transmittance of 0 or below)`,
      `${origin.file}, column ${origin.column}`,
      'use a thinner cell or dilute, then scan again',
    );
  const lost = y.filter(
    (value, i) => !Number.isFinite(value) && Number.isFinite(curve.y[axis === 'cm-1' ? y.length - 1 - i : i]),
  ).length;
  return { spectrum: makeSpectrum(name, x, y, origin), lost };
}

export function understood(
  spectra: readonly Spectrum[],
  known: Omit<Understood, 'format' | 'points' | 'range' | 'step' | 'columns'> & { format?: string },
): Understood {
  const { wavelength } = spectra[0]!;
  const steps = Array.from(wavelength.subarray(1), (value, i) => value - wavelength[i]!).sort((a, b) => a - b);
  return {
    format: 'delimited text',
    points: wavelength.length,
    range: [wavelength[0]!, wavelength.at(-1)!],
    step: steps[Math.floor(steps.length / 2)]!,
    columns: spectra.map((spectrum) => spectrum.name),
    ...known,
  };
}

interface RowsLayout {
  readonly header: number;
  readonly dialect: Omit<Dialect, 'first'>;
  readonly wavelengths: number[];
  readonly labels: number;
}

/** Samples in rows: a header line whose cells, after up to two for labels, are wavelengths in order. */
function rowsLayout(sample: readonly string[], options: ReadOptions): RowsLayout | null {
  for (const separator of ['\t', ';', ','] as const)
    for (const decimal of options.decimal ? [options.decimal] : (['point', 'comma'] as const)) {
      if (separator === ',' && decimal === 'comma') continue;
      for (const [index, line] of sample.slice(0, 60).entries()) {
        const cells = cellsOf(line, separator, decimal);
        if (cells.length < 6) continue;
        const values = cells.map((cell) =>
          cell.trim() === '' || isOverRange(cell.trim()) ? null : numberIn(cell.replace(/\s*nm$/i, ''), decimal),
        );
        const labels = values.findIndex((value) => value !== null);
        const axis = values.slice(labels) as number[];
        if (labels < 1 || labels > 3 || axis.length < 5 || axis.includes(null as never)) continue;
        const rises = axis.every((value, i) => i === 0 || value > axis[i - 1]!);
        const falls = axis.every((value, i) => i === 0 || value < axis[i - 1]!);
        if (!(rises || falls) || Math.min(...axis) < 150) continue;
        const next = sample.slice(index + 1).find((text) => text.trim() !== '');
        if (next === undefined || cellsOf(next, separator, decimal).length > cells.length) continue;
        return { header: index, dialect: { separator, decimal, width: cells.length }, wavelengths: axis, labels };
      }
    }
  return null;
}

function parseRows(
  sample: readonly string[],
  rest: Iterable<string>,
  layout: RowsLayout,
  fileName: string,
  sha256: string,
  options: ReadOptions,
): SpectraRead {
  const { dialect, labels } = layout;
  const prose = sample.slice(0, layout.header + 1).join('\n');
  const falling = layout.wavelengths[1]! < layout.wavelengths[0]!;
  const ordered = <T>(values: T[]): T[] => (falling ? values.toReversed() : values);
  const x = Float64Array.from(ordered(layout.wavelengths));
  const axis = options.axis ?? axisUnitIn(prose) ?? axisUnitOf(x, `${fileName}:${layout.header + 1}`);
  const spectra: Spectrum[] = [];
  const units = new Set<OrdinateUnit>();
  let number = layout.header + 1;
  let withoutValue = 0;
  let footerLines = 0;
  const take = (line: string): void => {
    number += 1;
    if (line.trim() === '') return;
    const cells = cellsOf(line, dialect.separator, dialect.decimal);
    const values = cells.slice(labels).map((cell) => numberIn(cell, dialect.decimal));
    if (values.every((value) => value === null)) {
      footerLines += 1;
      return;
    }
    const bad = values.indexOf(null);
    if (bad >= 0 || values.length > x.length)
      throw new TankhueError(
        'not-a-number',
        `expected ${x.length} numbers after ${labels} labels; received ${bad >= 0 ? quoted(cells[labels + bad]!) : `${values.length} numbers`}`,
        `${fileName}:${number}:${labels + Math.max(0, bad) + 1}`,
        'mend the line, or export the file again',
      );
    const y = Float64Array.from(ordered(layout.wavelengths.map((_, j) => values[j] ?? NaN)));
    withoutValue += y.filter(Number.isNaN).length;
    const unit = options.unit ?? ordinateUnitIn(prose) ?? ordinateUnitOf(y, `${fileName}:${number}`);
    units.add(unit);
    const name =
      cells
        .slice(0, labels)
        .map((cell) => cell.trim())
        .filter(Boolean)
        .join(' ') || `row ${spectra.length + 1}`;
    spectra.push(spectrumOf(name, { x, y }, axis, unit, { file: fileName, column: name, sha256 }).spectrum);
  };
  for (const line of sample.slice(layout.header + 1)) take(line);
  for (const line of rest) take(line);
  return {
    spectra,
    understood: understood(spectra, {
      layout: 'one spectrum in each row',
      separator: SEPARATOR_NAMES[dialect.separator],
      decimal: dialect.decimal,
      headerLines: layout.header + 1,
      footerLines,
      direction: falling ? 'descending' : 'ascending',
      axis,
      units: [...units],
      withoutValue,
    }),
  };
}
