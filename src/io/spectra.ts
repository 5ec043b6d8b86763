import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { linesOfBytes } from './decodeText.ts';
import { parseDelimited, type ReadOptions, type SpectraRead, type Understood } from './delimited.ts';
import { looksLikeJcamp, parseJcamp } from './jcamp.ts';
import { nearest } from './nearest.ts';

export type { ReadOptions, SpectraRead, Understood } from './delimited.ts';

/** Spectra from lines of text of any origin: delimited numbers or JCAMP-DX. */
export function parseSpectraLines(
  lines: Iterable<string>,
  fileName: string,
  sha256: string,
  options: ReadOptions = {},
): SpectraRead {
  const iterator = lines[Symbol.iterator]();
  const head: string[] = [];
  for (let next = iterator.next(); !next.done; next = iterator.next()) {
    head.push(next.value);
    if (next.value.trim() !== '') break;
  }
  const all = (function* () {
    yield* head;
    for (let next = iterator.next(); !next.done; next = iterator.next()) yield next.value;
  })();
  return looksLikeJcamp(head.at(-1) ?? '')
    ? parseJcamp(all, fileName, sha256, options)
    : parseDelimited(all, fileName, sha256, options);
}

/** Spectra from a whole file in memory. @throws TankhueError `file-empty`, `binary` and those of the formats */
export function parseSpectra(
  bytes: Uint8Array,
  fileName: string,
  sha256: string,
  options: ReadOptions = {},
): SpectraRead {
  if (bytes.length === 0)
    throw new TankhueError('file-empty', 'expected data; received an empty file', fileName, 'export the file again');
  return parseSpectraLines(linesOfBytes(bytes, fileName), fileName, sha256, options);
}

/**
 * The spectrum of a column name; without a name the only one there is.
 * @throws TankhueError `column-unknown`, `column-unclear`
 */
export function findColumn(spectra: readonly Spectrum[], name: string | null, where: string): Spectrum {
  const names = spectra.map((spectrum) => spectrum.name);
  const shown = names.slice(0, 10).join(', ') + (names.length > 10 ? `, … (${names.length} in all)` : '');
  if (name === null || name === '') {
    if (spectra.length === 1) return spectra[0]!;
    throw new TankhueError(
      'column-unclear',
      `expected the name of one of ${names.length} columns; received none`,
      where,
      `say which: ${shown}`,
    );
  }
  const found = spectra.filter((spectrum) => spectrum.name.trim() === name.trim());
  if (found.length === 1) return found[0]!;
  if (found.length > 1)
    throw new TankhueError(
      'column-unclear',
      `expected one column named "${name}"; received ${found.length}`,
      where,
      'give the columns different names',
    );
  const near = nearest(name, names);
  throw new TankhueError(
    'column-unknown',
    `expected one of the columns ${shown}; received "${name}"`,
    where,
    near ? `did you mean "${near}"?` : 'copy the name from the header of the file',
  );
}

/** What was understood, for a person. */
export const understoodText = (fileName: string, u: Understood): string =>
  `${fileName}: ${u.format}, ${u.layout}, ${u.columns.length} spectra of ${u.points} points, ${u.range[0].toFixed(1)} to ${u.range[1].toFixed(1)} nm every ${u.step.toFixed(2)} nm, ${u.direction}, read as ${u.units.join(' and ')}` +
  (u.format === 'JCAMP-DX'
    ? ''
    : `, separated by ${u.separator}, decimal ${u.decimal}, ${u.headerLines} header and ${u.footerLines} footer lines`) +
  (u.withoutValue > 0 ? `, ${u.withoutValue} readings without a value` : '');
