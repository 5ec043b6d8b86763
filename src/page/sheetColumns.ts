import { TANKS_COLUMNS } from '../index.ts';

export type SheetCells = Readonly<Record<string, string>>;

export interface SheetColumn {
  readonly name: string;
  readonly title: string;
  readonly hint: string;
  readonly choices?: readonly string[];
  readonly width: 'narrow' | 'wide';
}

/** The columns every plant needs; the rest of the sheet's columns are shown when asked for or filled. */
export const MAIN_COLUMNS: readonly SheetColumn[] = [
  { name: 'sample', title: 'Sample', hint: 'your name for the vial', width: 'wide' },
  {
    name: 'side',
    title: 'Side',
    hint: 'the tank it came from; composite is both tanks in one cuvette',
    choices: ['', 'negative', 'positive', 'composite'],
    width: 'wide',
  },
  { name: 'file', title: 'File', hint: 'one of the files above', width: 'wide' },
  { name: 'column', title: 'Column', hint: 'needed where a file holds several spectra', width: 'wide' },
  { name: 'path_mm', title: 'Path, mm', hint: 'the number engraved on the cell', width: 'narrow' },
  { name: 'dilution', title: 'Dilution', hint: '1 for undiluted, 20 for 1 mL made up to 20 mL', width: 'narrow' },
  { name: 'volume_L', title: 'Volume, L', hint: 'of the tank; without it there is no balance', width: 'narrow' },
];

const HINTS: Readonly<Record<string, string>> = {
  system: 'name of the plant, where there are several',
  blank_file: 'file of the acid scanned in the same cell',
  blank_column: 'its column',
  path_u_mm: 'uncertainty of the path',
  dilution_u: 'uncertainty of the dilution factor',
  temperature_C: 'of the cuvette',
  acid_mol_L: 'total sulfate or acid',
  taken_at: '2026-05-17T08:30',
  scanned_at: '2026-05-17T08:50',
  inert_gas: 'yes or no',
  replicate_of: 'the sample this is another filling of',
  cell: 'name of the physical cell',
  flask: 'name of the physical flask',
  volume_u_L: 'uncertainty of the volume',
  cells_in_series: 'of the stack, for Ah at its terminals',
  open_circuit_V: 'rest voltage of one cell',
};

const UNITS: readonly (readonly [RegExp, string])[] = [
  [/ mol L$/, ', mol/L'],
  [/ u mm$/, ' uncertainty, mm'],
  [/ u L$/, ' uncertainty, L'],
  [/ u$/, ' uncertainty'],
  [/ C$/, ', °C'],
  [/ (L|V|mol|Ah)$/, ', $1'],
];

/** `volume_u_L` → `Volume uncertainty, L` */
function words(name: string): string {
  const plain = name.replaceAll('_', ' ');
  const [pattern, unit] = UNITS.find(([candidate]) => candidate.test(plain)) ?? [/$/, ''];
  const text = plain.replace(pattern, unit);
  return text.charAt(0).toUpperCase() + text.slice(1);
}

export const FURTHER_COLUMNS: readonly SheetColumn[] = TANKS_COLUMNS.filter(
  (name) => !MAIN_COLUMNS.some((column) => column.name === name),
).map((name) => ({
  name,
  title: words(name),
  hint: HINTS[name] ?? '',
  width: name === 'note' || name.endsWith('file') ? 'wide' : 'narrow',
}));

/** Every column of the sheet, in the order in which it is written. */
export const SHEET_COLUMNS: readonly string[] = [...MAIN_COLUMNS, ...FURTHER_COLUMNS].map(({ name }) => name);

export const columnTitle = (name: string): string =>
  [...MAIN_COLUMNS, ...FURTHER_COLUMNS].find((column) => column.name === name)?.title ?? name;
