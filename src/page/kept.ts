import type { ReadOptions } from '../index.ts';
import type { SheetCells } from './sheetColumns.ts';

/** What survives a reload, in this browser only. */
export interface Kept {
  readonly rows: readonly SheetCells[];
  readonly shownColumns: readonly string[];
  readonly calibration: string;
  readonly files: readonly { readonly name: string; readonly options: ReadOptions; readonly base64: string }[];
}

const KEY = 'tankhue/bench/1';
/** characters; browsers give about five million to a page */
const MOST = 4_000_000;

/**
 * Keeps as many files as fit, in their order.
 * @returns names of files that did not fit
 */
export function keep(kept: Kept): string[] {
  let room = MOST;
  const left: string[] = [];
  const files = kept.files.filter(({ name, base64 }) => {
    room -= base64.length;
    if (room >= 0) return true;
    room += base64.length;
    left.push(name);
    return false;
  });
  try {
    localStorage.setItem(KEY, JSON.stringify({ ...kept, files }));
    return left;
  } catch {
    // Storage is full or not allowed here: the bench works on, it only does not survive a reload.
    localStorage.removeItem(KEY);
    return kept.files.map(({ name }) => name);
  }
}

export function kept(): Kept | null {
  try {
    const text = localStorage.getItem(KEY);
    return text === null ? null : asKept(JSON.parse(text));
  } catch {
    return null;
  }
}

export const forgetKept = (): void => localStorage.removeItem(KEY);

/** Another version of the page may have written it: what does not look right is not used. */
function asKept(data: unknown): Kept | null {
  const { rows, shownColumns, calibration, files } = data as Partial<Kept>;
  const isSound =
    Array.isArray(rows) &&
    rows.every((row) => Object.values(row as object).every((cell) => typeof cell === 'string')) &&
    Array.isArray(shownColumns) &&
    typeof calibration === 'string' &&
    Array.isArray(files) &&
    files.every(({ name, base64 }) => typeof name === 'string' && typeof base64 === 'string');
  return isSound ? { rows, shownColumns, calibration, files } : null;
}

/** Base64 of a file; of one that is too large to be kept anyway only its length counts, so it is not encoded. */
export function base64Of(bytes: Uint8Array): string {
  if (bytes.length > MOST) return ' '.repeat(MOST + 1);
  let text = '';
  for (let i = 0; i < bytes.length; i += 8192) text += String.fromCharCode(...bytes.subarray(i, i + 8192));
  return btoa(text);
}

export const bytesOf = (base64: string): Uint8Array => Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
