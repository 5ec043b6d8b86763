import type { CheckLog, CheckPoint } from '../bench/chart/checkLog.ts';
import { TankhueErrors, type TankhueError } from '../errors.ts';
import { readRows } from './samplesSheet.ts';
import { readSheet } from './sheet.ts';

export const CHECK_LOG_COLUMNS = ['taken_at', 'lot', 'assigned', 'baseline', 'note'] as const;
/** Columns of fitted effects: `mode_fine_scatter` is charted as `fine scatter`. */
const MODE_PREFIX = 'mode_';
const MILLISECONDS_PER_HOUR = 3_600_000;

/**
 * The log of a check standard, in time order. An empty value is a day that was missed; it stays on the chart as such.
 * @param valueColumn the column to chart
 * @param unit of that column; empty for a plain number
 * @throws TankhueErrors with the problems of every row
 */
export function readCheckLog(
  bytes: Uint8Array,
  fileName: string,
  sha256: string,
  valueColumn: string,
  unit: string,
): CheckLog {
  const sheet = readSheet(bytes, fileName, [...CHECK_LOG_COLUMNS, valueColumn], ['taken_at', valueColumn]);
  const modeColumns = sheet.columns.filter((column) => column.startsWith(MODE_PREFIX));
  const modeName = (column: string) => column.slice(MODE_PREFIX.length).replaceAll('_', ' ');
  const { rows, problems } = readRows(sheet, (read) => {
    const time = read.time('taken_at');
    if (time === null && read.text('taken_at') === null)
      read.refuse(
        'not-a-time',
        'taken_at',
        'expected the time of the measurement; received an empty cell',
        'write 2026-05-17T08:30, also where the value is missing',
      );
    const point: Omit<CheckPoint, 'hours'> = {
      at: read.text('taken_at') ?? '',
      lot: read.text('lot') ?? '',
      value: read.number(valueColumn) ?? NaN,
      assigned: read.number('assigned') ?? NaN,
      inBaseline: read.flag('baseline'),
      modes: Object.fromEntries(modeColumns.map((column) => [modeName(column), read.number(column) ?? NaN])),
    };
    return { time: time ?? NaN, point };
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  const ordered = [...rows].sort((a, b) => a.time - b.time);
  const start = ordered[0]!.time;
  return {
    quantity: valueColumn.replaceAll('_', ' '),
    unit,
    points: ordered.map(({ time, point }) => ({ ...point, hours: (time - start) / MILLISECONDS_PER_HOUR })),
    modeNames: modeColumns.map(modeName),
    wasReordered: ordered.some((each, i) => each !== rows[i]),
    origin: { file: fileName, column: valueColumn, sha256 },
  };
}
