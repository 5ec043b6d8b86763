import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import type { Captions } from './captions.ts';
import { decideAxisUnit, decideOrdinateUnit, type Decided } from './decideUnits.ts';
import type { AxisUnit, OrdinateUnit, ReadOptions } from './readOptions.ts';
import { spectrumFromPoints, type MeasuredPoints } from './spectrumFromPoints.ts';
import type { TableStore } from './tableStore.ts';
import type { UnderstoodSpectrum } from './understood.ts';

/** Where the numbers of a table came from. */
export interface TableSource {
  readonly file: string;
  readonly store: TableStore;
  readonly captions: Captions;
  readonly options: ReadOptions;
}

export interface TableSpectra {
  readonly spectra: Spectrum[];
  readonly understood: UnderstoodSpectrum[];
  readonly assumed: Set<string>;
  readonly leftOut: string[];
}

interface Axis {
  readonly column: number;
  readonly values: Float64Array;
  readonly unit: Decided<AxisUnit>;
}

const nothingYet = (): TableSpectra => ({ spectra: [], understood: [], assumed: new Set(), leftOut: [] });

const countNaN = (values: Float64Array): number =>
  values.reduce((sum, value) => sum + (Number.isNaN(value) ? 1 : 0), 0);

function add(
  into: TableSpectra,
  axis: Decided<AxisUnit>,
  unit: Decided<OrdinateUnit>,
  points: Omit<MeasuredPoints, 'axisUnit' | 'unit' | 'missing'>,
): void {
  const missing = countNaN(points.values) - points.overRange;
  const { spectrum, understood } = spectrumFromPoints({ ...points, missing, axisUnit: axis.unit, unit: unit.unit });
  into.spectra.push(spectrum);
  into.understood.push(understood);
  for (const sentence of [axis.assumed, unit.assumed]) if (sentence) into.assumed.add(sentence);
}

function refuseNothing(file: string): never {
  throw new TankhueError(
    'no-values',
    'expected a column of values beside the axis; received empty columns',
    file,
    'export the spectrum again',
  );
}

/** One axis, a spectrum in each column after it. @throws TankhueError */
export function spectraFromColumns(source: TableSource): TableSpectra {
  const { file, store, captions, options } = source;
  const all = Array.from({ length: store.width }, (_, i) => i);
  const named = all.filter((i) => captions.axisUnit(i) !== null);
  const column = named.length === 1 && named[0]! < store.width - 1 ? named[0]! : 0;
  const values = store.column(column);
  const unit = decideAxisUnit(values, captions.axisUnit(column), options, `${file}:${store.line(0)}:${column + 1}`);
  const columns = all.filter(
    (i) => i > column && !(captions.of(i).length === 0 && store.column(i).every(Number.isNaN)),
  );
  const into = nothingYet();
  into.leftOut.push(...all.filter((i) => i < column).map((i) => captions.name(i)));
  for (const one of columns)
    addColumn(into, source, { column, values, unit }, one, captions.ordinateUnit(one, columns));
  if (into.spectra.length === 0) refuseNothing(file);
  return into;
}

function addColumn(
  into: TableSpectra,
  { file, store, captions, options }: TableSource,
  axis: Axis,
  column: number,
  caption: OrdinateUnit | null,
): void {
  const values = store.column(column);
  const name = captions.name(column);
  const unit = decideOrdinateUnit(values, caption, options, `${file}:${store.line(0)}:${column + 1}`);
  add(into, axis.unit, unit, {
    name,
    axis: axis.values,
    values,
    overRange: store.overRangeInColumn(column),
    origin: { file, column: name, sha256: '' },
    whereOf: (point) => `${file}:${store.line(point)}:${axis.column + 1}`,
  });
}

/** Axis and values in turn, each pair as long as it is. @throws TankhueError */
export function spectraFromPairs(source: TableSource): TableSpectra {
  const { file, store, captions, options } = source;
  const axisColumns = Array.from({ length: Math.floor(store.width / 2) }, (_, i) => 2 * i);
  const columns = axisColumns.map((i) => i + 1);
  const into = nothingYet();
  for (const column of axisColumns) {
    const axis = store.column(column);
    const values = store.column(column + 1);
    const rows = Array.from(axis.keys()).filter((i) => !(Number.isNaN(axis[i]) && Number.isNaN(values[i])));
    if (rows.length === 0) continue;
    const known = Float64Array.from(rows, (i) => axis[i]!);
    const where = `${file}:${store.line(rows[0]!)}:`;
    const unit = decideOrdinateUnit(
      values,
      captions.ordinateUnit(column + 1, columns),
      options,
      `${where}${column + 2}`,
    );
    const name = captions.nameOfPair(column);
    add(into, decideAxisUnit(known, captions.axisUnit(column), options, `${where}${column + 1}`), unit, {
      name,
      axis: known,
      values: Float64Array.from(rows, (i) => values[i]!),
      overRange: store.overRangeInColumn(column + 1),
      origin: { file, column: name, sha256: '' },
      whereOf: (point) => `${file}:${store.line(rows[point]!)}:${column + 1}`,
    });
  }
  if (into.spectra.length === 0) refuseNothing(file);
  return into;
}

/** The axis along the first line, a spectrum in each line below. */
export interface AxisAlong {
  readonly values: Float64Array;
  /** caption of the corner cell */
  readonly corner: string;
  readonly line: number;
  /** cells before the first value */
  readonly labels: number;
}

/** @throws TankhueError */
export function spectraFromRows(source: TableSource, along: AxisAlong, labels: readonly string[]): TableSpectra {
  const { file, store, captions, options } = source;
  const where = `${file}:${along.line}:`;
  const axis = decideAxisUnit(
    along.values,
    captions.axisUnitAlong(along.corner),
    options,
    `${where}${along.labels + 1}`,
  );
  const caption = captions.ordinateUnitAlong(along.corner);
  const into = nothingYet();
  for (let row = 0; row < store.rows; row++) {
    const values = store.row(row);
    const name = labels[row] || `row ${row + 1}`;
    add(into, axis, decideOrdinateUnit(values, caption, options, `${file}:${store.line(row)}:${along.labels + 1}`), {
      name,
      axis: along.values,
      values,
      overRange: store.overRangeInRow(row),
      origin: { file, column: name, sha256: '' },
      whereOf: (point) => `${where}${along.labels + point + 1}`,
    });
  }
  return into;
}
