import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import type { Captions } from './captions.ts';
import { decideAxisUnit, decideOrdinateUnit, type Decided } from './decideUnits.ts';
import type { AxisUnit, OrdinateUnit, ReadOptions } from './readOptions.ts';
import { measuredAxis, measuredSpectrum, type MeasuredAxis, type MeasuredValues } from './spectrumFromPoints.ts';
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

const nothingYet = (): TableSpectra => ({ spectra: [], understood: [], assumed: new Set(), leftOut: [] });

function add(
  into: TableSpectra,
  axis: MeasuredAxis,
  unit: Decided<OrdinateUnit>,
  values: Omit<MeasuredValues, 'unit'>,
): void {
  const { spectrum, understood } = measuredSpectrum(axis, { ...values, unit: unit.unit });
  into.spectra.push(spectrum);
  into.understood.push(understood);
  if (unit.assumed) into.assumed.add(unit.assumed);
}

/** The axis that spectra added afterwards lie on. */
function axisFor(
  into: TableSpectra,
  values: Float64Array,
  caption: AxisUnit | null,
  options: ReadOptions,
  whereOf: (point: number) => string,
): MeasuredAxis {
  const { unit, assumed } = decideAxisUnit(values, caption, options, whereOf(0));
  if (assumed) into.assumed.add(assumed);
  return measuredAxis(values, unit, whereOf);
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
  const columns = all.filter((i) => i > column && !(captions.of(i).length === 0 && store.isEmpty(i)));
  if (columns.length === 0) refuseNothing(file);
  const into = nothingYet();
  into.leftOut.push(...all.filter((i) => i < column).map((i) => captions.name(i)));
  const whereOf = (point: number): string => `${file}:${store.line(point)}:${column + 1}`;
  const axis = axisFor(
    into,
    store.column(column),
    captions.axisUnit(column) ?? captions.statedAxisUnit,
    options,
    whereOf,
  );
  const unitsThroughout = captions.haveUnits(columns);
  for (const one of columns) {
    const values = store.column(one);
    const name = captions.name(one);
    const where = `${file}:${store.line(0)}:${one + 1}`;
    add(into, axis, decideOrdinateUnit(values, captions.ordinateUnit(one, unitsThroughout), options, where), {
      name,
      values,
      overRange: store.overRangeInColumn(one),
      origin: { file, column: name, sha256: '' },
    });
  }
  return into;
}

/** Axis and values in turn, each pair as long as it is. @throws TankhueError */
export function spectraFromPairs(source: TableSource): TableSpectra {
  const { file, store, captions, options } = source;
  const axisColumns = Array.from({ length: Math.floor(store.width / 2) }, (_, i) => 2 * i);
  const unitsThroughout = captions.haveUnits(axisColumns.map((i) => i + 1));
  const into = nothingYet();
  for (const column of axisColumns) {
    const axis = store.column(column);
    const values = store.column(column + 1);
    const rows = Array.from(axis.keys()).filter((i) => !(Number.isNaN(axis[i]) && Number.isNaN(values[i])));
    if (rows.length === 0) continue;
    const known = Float64Array.from(rows, (i) => axis[i]!);
    const whereOf = (point: number): string => `${file}:${store.line(rows[point]!)}:${column + 1}`;
    const where = `${file}:${store.line(rows[0]!)}:${column + 2}`;
    const name = captions.nameOfPair(column);
    const caption = captions.ordinateUnit(column + 1, unitsThroughout);
    const measured = axisFor(into, known, captions.axisUnit(column) ?? captions.statedAxisUnit, options, whereOf);
    add(into, measured, decideOrdinateUnit(values, caption, options, where), {
      name,
      values: Float64Array.from(rows, (i) => values[i]!),
      overRange: store.overRangeInColumn(column + 1),
      origin: { file, column: name, sha256: '' },
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
  const into = nothingYet();
  const axisWhere = (point: number): string => `${file}:${along.line}:${along.labels + point + 1}`;
  const axis = axisFor(into, along.values, captions.axisUnitAlong(along.corner), options, axisWhere);
  const caption = captions.ordinateUnitAlong(along.corner);
  for (let row = 0; row < store.rows; row++) {
    const values = store.row(row);
    const name = labels[row] || `row ${row + 1}`;
    const where = `${file}:${store.line(row)}:${along.labels + 1}`;
    add(into, axis, decideOrdinateUnit(values, caption, options, where), {
      name,
      values,
      overRange: store.overRangeInRow(row),
      origin: { file, column: name, sha256: '' },
    });
  }
  return into;
}
