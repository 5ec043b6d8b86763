import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { linesOfChunks } from './decodeText.ts';
import { parseDelimited } from './delimited.ts';
import { looksLikeJcamp, parseJcamp } from './jcamp.ts';
import { listed, nearest } from './nearest.ts';
import type { ReadOptions } from './readOptions.ts';
import type { SpectraRead } from './understood.ts';

function* following(head: readonly string[], rest: Iterator<string>): Generator<string> {
  yield* head;
  for (let next = rest.next(); !next.done; next = rest.next()) yield next.value;
}

/**
 * Spectra of a file that comes in pieces: delimited numbers or JCAMP-DX, told apart by the first line that is not blank.
 * @param fileName as used in messages and in each spectrum's origin, whose hash stays empty
 * @param options what the person says where the file does not
 * @throws TankhueError, TankhueErrors when the file cannot be read, or can be read in two ways
 */
export function parseSpectraChunks(
  chunks: Iterable<Uint8Array>,
  fileName: string,
  options: ReadOptions = {},
): SpectraRead {
  const { encoding, lines } = linesOfChunks(chunks, fileName);
  const iterator = lines[Symbol.iterator]();
  const head: string[] = [];
  for (let next = iterator.next(); !next.done; next = iterator.next()) {
    head.push(next.value);
    if (next.value.trim() !== '' && !next.value.trim().startsWith('$$')) break;
  }
  const all = following(head, iterator);
  const read = looksLikeJcamp(head.at(-1) ?? '')
    ? parseJcamp(all, fileName, encoding, options)
    : parseDelimited(all, fileName, encoding, options);
  if (!read.spectra.some(hasValues)) refuseWithoutValues(read.spectra[0]!.name, fileName);
  return read;
}

const hasValues = ({ absorbance }: Spectrum): boolean => absorbance.some((value) => !Number.isNaN(value));

function refuseWithoutValues(name: string, where: string): never {
  throw new TankhueError(
    'no-values',
    `expected absorbances in ${name}; received points over range, missing, or of transmittance 0 or below only`,
    where,
    'dilute the sample or use a thinner cell, and check that the shutter was open',
  );
}

/** The same spectra with the hash of their file in each origin. */
export const withHash = (read: SpectraRead, sha256: string): SpectraRead => ({
  ...read,
  spectra: read.spectra.map((spectrum) => ({ ...spectrum, origin: { ...spectrum.origin, sha256 } })),
});

/**
 * Spectra of a whole file in memory.
 * @param sha256 of the bytes; empty where nobody needs it
 * @throws TankhueError, TankhueErrors as `parseSpectraChunks`
 */
export const parseSpectra = (
  bytes: Uint8Array,
  fileName: string,
  sha256: string,
  options: ReadOptions = {},
): SpectraRead => withHash(parseSpectraChunks([bytes], fileName, options), sha256);

/**
 * The spectrum of a column name; without a name the only one there is.
 * @throws TankhueError `column-unknown`, `column-unclear`, `no-values`
 */
export function findColumn(spectra: readonly Spectrum[], name: string | null, where: string): Spectrum {
  const spectrum = columnNamed(spectra, name, where);
  return hasValues(spectrum) ? spectrum : refuseWithoutValues(spectrum.name, where);
}

function columnNamed(spectra: readonly Spectrum[], name: string | null, where: string): Spectrum {
  const names = spectra.map((spectrum) => spectrum.name);
  if (name === null || name === '') {
    if (spectra.length === 1) return spectra[0]!;
    throw new TankhueError(
      'column-unclear',
      `expected the name of one of ${names.length} columns; received none`,
      where,
      `say which: ${listed(names)}`,
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
    `expected one of the columns ${listed(names)}; received "${name}"`,
    where,
    near ? `did you mean "${near}"?` : 'copy the name from the header of the file',
  );
}
