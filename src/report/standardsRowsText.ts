import type { StandardsSheetRow } from '../bench/standardsRow.ts';
import { STANDARDS_COLUMNS } from '../io/standardsSheet.ts';
import { csvLine } from './csv.ts';

/** A standards sheet of rows made at the bench; `file` is empty where nobody has named the spectrum yet. */
export const standardsRowsCsv = (
  rows: readonly StandardsSheetRow[],
  columns: readonly string[] = STANDARDS_COLUMNS,
): string =>
  `${[csvLine(columns), ...rows.map((row) => csvLine(columns.map((column) => row[column] ?? null)))].join('\n')}\n`;
