import { csvLine } from '../index.ts';
import { MAIN_COLUMNS, SHEET_COLUMNS, type SheetCells } from './sheetColumns.ts';

/** Columns that are written: the usual ones, those that are shown, and any that holds something; unknown ones of a dropped sheet last. */
export function writtenColumns(rows: readonly SheetCells[], shown: readonly string[]): string[] {
  const filled = new Set(rows.flatMap((row) => Object.keys(row).filter((column) => (row[column] ?? '') !== '')));
  const main = new Set(MAIN_COLUMNS.map(({ name }) => name));
  return [
    ...SHEET_COLUMNS.filter((column) => main.has(column) || shown.includes(column) || filled.has(column)),
    ...[...filled].filter((column) => !SHEET_COLUMNS.includes(column)),
  ];
}

/** The sheet as the reader takes it: every cell as it was typed. */
export function sheetToCompute(rows: readonly SheetCells[], columns: readonly string[]): string {
  const quotedCell = (text: string): string => (/[",\n\r]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);
  return [columns, ...rows.map((row) => columns.map((column) => row[column] ?? ''))]
    .map((cells) => `${cells.map(quotedCell).join(',')}\n`)
    .join('');
}

/** The sheet as a file: what a spreadsheet would run as a formula is disarmed. */
export const sheetToSave = (rows: readonly SheetCells[], columns: readonly string[]): string =>
  [columns, ...rows.map((row) => columns.map((column) => row[column] ?? ''))]
    .map((cells) => `${csvLine(cells)}\n`)
    .join('');
