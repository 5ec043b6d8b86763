import type { StandardsSheetRow } from '../bench/standardsRow.ts';
import { SPECIES } from '../electrolyte/species.ts';
import { readSheet } from './sheet.ts';
import { STANDARDS_COLUMNS } from './standardsSheet.ts';

/** What a new label replaces; where the spectrum lies, its path and its role stay. */
const LABEL_COLUMNS = [...SPECIES.map((species) => `${species}_mol_L`), 'u_mol_L', 'preparation'];

export interface RelabelledSheet {
  readonly columns: readonly string[];
  /** cells by column, in the order of the sheet; standards that were not on it come last */
  readonly rows: readonly StandardsSheetRow[];
  /** standards of the sheet that got a new label, with the concentrations before and after */
  readonly changed: readonly { readonly standard: string; readonly before: string; readonly after: string }[];
}

/**
 * A standards sheet whose standards of the given names get the given labels; unknown columns are kept.
 * @throws TankhueError(s) as the standards sheet itself
 */
export function relabelStandards(
  bytes: Uint8Array,
  fileName: string,
  labels: readonly StandardsSheetRow[],
): RelabelledSheet {
  const sheet = readSheet(bytes, fileName, STANDARDS_COLUMNS, ['standard']);
  const columns = [...new Set([...sheet.columns.filter(Boolean), 'standard', ...LABEL_COLUMNS])];
  const byName = new Map(labels.map((label) => [String(label['standard']), label]));
  const used = new Set<string>();
  const changed: { standard: string; before: string; after: string }[] = [];
  const rows = sheet.rows.map(({ cells }): StandardsSheetRow => {
    const plain = Object.fromEntries(columns.map((column) => [column, cells.get(column) || null]));
    const label = byName.get(cells.get('standard') ?? '');
    if (!label) return plain;
    const standard = String(label['standard']);
    used.add(standard);
    const relabelled = {
      ...plain,
      ...Object.fromEntries(LABEL_COLUMNS.map((column) => [column, label[column] ?? null])),
    };
    changed.push({ standard, before: concentrationsOf(plain), after: concentrationsOf(relabelled) });
    return relabelled;
  });
  return { columns, rows: [...rows, ...labels.filter((label) => !used.has(String(label['standard'])))], changed };
}

const concentrationsOf = (row: StandardsSheetRow): string =>
  SPECIES.flatMap((species) => {
    const value = row[`${species}_mol_L`];
    return value === null || value === undefined || Number(value) === 0 ? [] : [`${species} ${value}`];
  }).join(', ') || 'nothing';
