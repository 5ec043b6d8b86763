import { TankhueError, quoted } from '../errors.ts';

/** An axis as a line wrote it. */
export interface WrittenAxis {
  /** nm, ascending */
  readonly wavelength: Float64Array;
  /** the line, and those that lean on it, write it descending */
  readonly descending: boolean;
}

/** One line of `{"wavelength":[…],"absorbance":[…],"sample":"…","time":…}`; wavelength may stand in the first line only. */
export interface JsonRow extends WrittenAxis {
  /** NaN where the line has null */
  readonly absorbance: Float64Array;
  readonly sample: string | null;
  readonly time: string | null;
}

/**
 * @param fallback axis of the first line, for lines without one
 * @throws TankhueError `not-json`, `no-wavelengths`, `length-differs`, `axis-turns`
 */
export function jsonRow(line: string, fallback: WrittenAxis | null, where: string): JsonRow {
  const value = objectIn(line, where);
  const written = numbersIn(value['wavelength']);
  const readings = numbersIn(value['absorbance']);
  const axis = written ? ascending(written, where) : fallback;
  if (axis === null || readings === null)
    throw new TankhueError(
      'no-wavelengths',
      `expected arrays "wavelength" (nm) and "absorbance"; received ${quoted(Object.keys(value).join(', '))}`,
      where,
      'the first line needs both; later ones may leave the wavelengths out',
    );
  if (readings.length !== axis.wavelength.length)
    throw new TankhueError(
      'length-differs',
      `expected ${axis.wavelength.length} absorbances, one a wavelength; received ${readings.length}`,
      where,
      'write null where there is no value',
    );
  const text = (name: string): string | null => {
    const one = value[name];
    return typeof one === 'string' || typeof one === 'number' ? String(one) : null;
  };
  return {
    ...axis,
    absorbance: axis.descending ? readings.reverse() : readings,
    sample: text('sample'),
    time: text('time'),
  };
}

function objectIn(line: string, where: string): Record<string, unknown> {
  let reason = 'not an object';
  try {
    const value: unknown = JSON.parse(line);
    if (typeof value === 'object' && value !== null) return value as Record<string, unknown>;
  } catch (error) {
    reason = (error as Error).message;
  }
  throw new TankhueError(
    'not-json',
    `expected one JSON object a line; received ${quoted(line)} (${reason})`,
    where,
    'write {"wavelength":[…],"absorbance":[…]} on one line',
  );
}

function ascending(written: Float64Array, where: string): WrittenAxis {
  const descending = written[1]! < written[0]!;
  const wavelength = descending ? written.slice().reverse() : written;
  for (let i = 0; i < wavelength.length; i++)
    if (!(wavelength[i]! > (i === 0 ? 0 : wavelength[i - 1]!)))
      throw new TankhueError(
        'axis-turns',
        `expected wavelengths in nm that only rise or only fall; received ${wavelength[i]}`,
        where,
        'sort the points',
      );
  return { wavelength, descending };
}

/** Numbers, NaN for null; null where it is no array of those. */
function numbersIn(value: unknown): Float64Array | null {
  if (!Array.isArray(value) || value.length < 2) return null;
  const numbers = Float64Array.from(value, (one: unknown) => (typeof one === 'number' ? one : NaN));
  return value.every((one) => one === null || typeof one === 'number') ? numbers : null;
}
