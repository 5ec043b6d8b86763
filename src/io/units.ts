import { TankhueError } from '../errors.ts';
import {
  absorbanceFromMilliabsorbance,
  absorbanceFromPercentTransmittance,
  absorbanceFromTransmittance,
  nanometresFromWavenumber,
} from '../units.ts';

export type OrdinateUnit = 'A' | 'mA' | '%T' | 'T';
export type AxisUnit = 'nm' | 'cm-1';

/** The unit words of a header, prose around them allowed; null where there is none. */
export function ordinateUnitIn(text: string): OrdinateUnit | null {
  if (/%\s*T\b|T\s*%|transmi\w*\s*[([/]?\s*%|%\s*transmi/i.test(text)) return '%T';
  if (/\bmA(?:U|bs)?\b|milli-?abs/i.test(text) && !/\bma\b(?!u|bs)/.test(text)) return 'mA';
  if (/\btransmittance\b|\btransmission\b/i.test(text)) return 'T';
  if (/\babs(?:orbance)?\b|\bextinction\b|[([,;\t ]\s*A\s*[)\],;\t ]|^A$|\bA\.?U\.?\b/i.test(text)) return 'A';
  return null;
}

export function axisUnitIn(text: string): AxisUnit | null {
  if (/cm\s*[-−^⁻]+\s*[1¹]|cm⁻¹|1\/cm|wave\s*number/i.test(text)) return 'cm-1';
  if (/\bnm\b|_nm\b|nanomet|wave\s*length|\blambda\b|λ/i.test(text)) return 'nm';
  return null;
}

const TO_ABSORBANCE: Readonly<Record<OrdinateUnit, (value: number) => number>> = {
  A: (value) => value,
  mA: absorbanceFromMilliabsorbance,
  '%T': absorbanceFromPercentTransmittance,
  T: absorbanceFromTransmittance,
};

export const toAbsorbance = (unit: OrdinateUnit): ((value: number) => number) => TO_ABSORBANCE[unit];
export const toNanometres = (unit: AxisUnit): ((value: number) => number) =>
  unit === 'nm' ? (value) => value : nanometresFromWavenumber;

/** Absorbances beyond this are not absorbances. */
const LARGEST_ABSORBANCE = 8;

/** Without a word in the header: small numbers are absorbance, others could be several things. @throws TankhueError `unit-unclear` */
export function ordinateUnitOf(values: Float64Array, where: string): OrdinateUnit {
  const finite = values.filter(Number.isFinite);
  const largest = finite.reduce((a, b) => Math.max(a, b), -Infinity);
  const smallest = finite.reduce((a, b) => Math.min(a, b), Infinity);
  if (largest <= LARGEST_ABSORBANCE && smallest > -2) return 'A';
  throw new TankhueError(
    'unit-unclear',
    `expected a unit in the header or values that can only be absorbance; received ${smallest} to ${largest}, which may be per cent transmittance or milliabsorbance`,
    where,
    'say --unit %T or --unit mA',
  );
}

/** Without a word: 150 to 3500 can only be nanometres here; above, nothing is certain. @throws TankhueError `axis-unclear` */
export function axisUnitOf(values: Float64Array, where: string): AxisUnit {
  const largest = values.reduce((a, b) => Math.max(a, b), -Infinity);
  const smallest = values.reduce((a, b) => Math.min(a, b), Infinity);
  if (smallest >= 150 && largest <= 3500) return 'nm';
  throw new TankhueError(
    'axis-unclear',
    `expected wavelengths of 150 to 3500 nm, or a unit in the header; received ${smallest} to ${largest}, which may be nm or cm⁻¹`,
    where,
    'say --axis nm or --axis cm-1',
  );
}
