import { TankhueError } from '../errors.ts';
import type { AxisUnit, OrdinateUnit, ReadOptions } from './readOptions.ts';

// What        Which unit an axis and a column of values are in: the person's word, else the caption's, else what the values leave open.
// Why so      %T read as A, or cm⁻¹ as nm, gives a plausible picture and a wrong composition. So values that allow two readings are refused.
// Valid for   UV-Vis-NIR photometers: 150-3500 nm, absorbance below 10, transmittance up to 1.5 (noise and blanks darker than the sample).
// Source      ours; the limits are common practice, no source.

/** No photometer of this kind reaches beyond; as wavenumbers 150-3500 cm⁻¹ would be 3-67 µm, outside every cuvette's window. */
const NANOMETRES = { least: 150, most: 3500 };
const NO_WORD_MEANS_ABSORBANCE = 'values are absorbance: no caption names another unit';
const MOST_ABSORBANCE = 10;
const MOST_TRANSMITTANCE = 1.5;
/** Above, a "transmittance" can only be per cent. */
const LEAST_CLEAR_PERCENT = 5;

export interface Decided<Unit> {
  readonly unit: Unit;
  /** what was taken for granted; null when the file or the person says it */
  readonly assumed: string | null;
}

/** Least and greatest number, NaN left out; both NaN when there is none. */
export function extremes(values: ArrayLike<number>): { least: number; most: number } {
  let least = Infinity;
  let most = -Infinity;
  for (let i = 0; i < values.length; i++) {
    if (values[i]! < least) least = values[i]!;
    if (values[i]! > most) most = values[i]!;
  }
  return least > most ? { least: NaN, most: NaN } : { least, most };
}

const span = ({ least, most }: { least: number; most: number }): string => `${least} … ${most}`;

/**
 * @param caption the unit that the file names, if any
 * @throws TankhueError `axis-unit`
 */
export function decideAxisUnit(
  axis: ArrayLike<number>,
  caption: AxisUnit | null,
  options: ReadOptions,
  where: string,
): Decided<AxisUnit> {
  if (options.axis) return { unit: options.axis, assumed: null };
  const range = extremes(axis);
  const asNanometres = range.least >= NANOMETRES.least && range.most <= NANOMETRES.most;
  const received = `received ${span(range)}${caption ? ` under a caption that says ${caption}` : ' without a word for the unit'}`;
  if (caption === 'nm' && asNanometres) return { unit: 'nm', assumed: null };
  if (caption === 'cm-1' && range.least >= 1e7 / NANOMETRES.most) return { unit: 'cm-1', assumed: null };
  if (caption === 'um' && range.most <= NANOMETRES.most / 1000) return { unit: 'um', assumed: null };
  if (caption === null && asNanometres)
    return { unit: 'nm', assumed: `the axis is in nm: ${span(range)} can be nothing else here` };
  const wavelength = (value: number): string => (1e7 / value).toPrecision(4);
  throw new TankhueError(
    'axis-unit',
    `expected an axis of ${NANOMETRES.least}-${NANOMETRES.most} nm or a named unit that fits it; ${received}`,
    where,
    `say --axis nm (${span(range)} nm) or --axis cm-1 (${wavelength(range.most)} … ${wavelength(range.least)} nm)`,
  );
}

const asAbsorbance = (percent: number): string => (percent > 0 ? (2 - Math.log10(percent)).toPrecision(3) : 'no light');

function refuseUnit(range: { least: number; most: number }, caption: OrdinateUnit | null, where: string): never {
  const said = caption ? `under a caption that says ${caption}` : 'without a word for the unit';
  const readings =
    range.most > MOST_ABSORBANCE
      ? [
          `--unit %T (absorbance ${asAbsorbance(range.most)} at the highest value)`,
          `--unit mA (absorbance ${(range.most / 1000).toPrecision(3)} there)`,
        ]
      : [
          `--unit A (absorbance ${range.most.toPrecision(3)} at the highest value)`,
          `--unit %T (${asAbsorbance(range.most)} there)`,
          `--unit T (${asAbsorbance(range.most * 100)} there)`,
        ];
  throw new TankhueError(
    'value-unit',
    `expected values whose unit is certain (A, mA, %T or T); received ${span(range)} ${said}`,
    where,
    `say ${readings.join(' or ')}`,
  );
}

/**
 * @param caption the unit that the file names, if any
 * @throws TankhueError `value-unit`
 */
export function decideOrdinateUnit(
  values: ArrayLike<number>,
  caption: OrdinateUnit | null,
  options: ReadOptions,
  where: string,
): Decided<OrdinateUnit> {
  if (options.unit) return { unit: options.unit, assumed: null };
  const range = extremes(values);
  if (Number.isNaN(range.most)) return { unit: caption ?? 'A', assumed: null };
  const fits: Record<OrdinateUnit, boolean> = {
    A: range.most <= MOST_ABSORBANCE && range.least >= -MOST_ABSORBANCE,
    mA: range.most <= MOST_ABSORBANCE * 1000,
    '%T': range.most <= 0 || (range.most > MOST_TRANSMITTANCE && range.most <= MOST_TRANSMITTANCE * 100),
    T: range.most <= MOST_TRANSMITTANCE,
  };
  if (caption === 'T' && range.most >= LEAST_CLEAR_PERCENT && fits['%T'])
    return { unit: '%T', assumed: `transmittance up to ${range.most} is in per cent: it cannot exceed 1 otherwise` };
  if (caption !== null) return fits[caption] ? { unit: caption, assumed: null } : refuseUnit(range, caption, where);
  if (!fits.A) refuseUnit(range, null, where);
  return { unit: 'A', assumed: NO_WORD_MEANS_ABSORBANCE };
}
