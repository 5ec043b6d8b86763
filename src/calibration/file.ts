import { TankhueError } from '../errors.ts';
import { readStrictJson } from '../json/strictJson.ts';
import type { Calibration, PairCalibration } from './calibration.ts';
import { calibrationSchema, type CalibrationFile } from './schema.ts';

/**
 * The text of `tankhue/calibration/1`: same calibration, same bytes; `parseCalibration` gives back exactly what was written.
 * @throws TankhueError `not-finite` for a number that JSON cannot hold
 */
export function serialiseCalibration(calibration: Calibration): string {
  const pairs = calibration.pairs.map(({ design, ...pair }) => ({
    ...pair,
    design: { ...design, condition: Number.isFinite(design.condition) ? design.condition : null },
  }));
  return `${written({ schema: 'tankhue/calibration/1', ...calibration, pairs }, '$', '\n')}\n`;
}

/** JSON with one line for each array of numbers: a person can page through it and a comparison of two files stays readable. */
function written(value: unknown, path: string, newLine: string): string {
  const inner = `${newLine} `;
  const block = (open: string, members: readonly string[], close: string): string =>
    members.length === 0 ? open + close : `${open}${inner}${members.join(`,${inner}`)}${newLine}${close}`;
  if (typeof value === 'number') return numberText(value, path);
  if (value instanceof Float64Array || (Array.isArray(value) && isRow(value)))
    return `[${Array.from(value, (one, i) => numberText(one, `${path}[${i}]`)).join(',')}]`;
  if (Array.isArray(value))
    return block(
      '[',
      value.map((one, i) => written(one, `${path}[${i}]`, inner)),
      ']',
    );
  if (typeof value !== 'object' || value === null) return JSON.stringify(value);
  const fields = Object.entries(value).filter(([, field]) => field !== undefined);
  return block(
    '{',
    fields.map(([key, field]) => `${JSON.stringify(key)}: ${written(field, `${path}.${key}`, inner)}`),
    '}',
  );
}

const isRow = (value: readonly unknown[]): value is number[] =>
  value.length > 0 && value.every((one) => typeof one === 'number');

function numberText(value: number, path: string): string {
  if (!Number.isFinite(value))
    throw new TankhueError(
      'not-finite',
      `expected a finite number; received ${value}`,
      `calibration ${path}`,
      'these standards leave something undetermined: look at the findings, make more compositions',
    );
  return Object.is(value, -0) ? '-0' : String(value);
}

/**
 * Reads `tankhue/calibration/1` strictly.
 * @param where file name, for messages
 * @throws TankhueError(s) `json-broken`, `field-missing`, `field-unknown`, `not-finite`, `field-wrong` with the JSON path, all at once
 */
export function parseCalibration(text: string, where = 'calibration'): Calibration {
  return revived(readStrictJson(calibrationSchema, text, where, 'a calibration (tankhue calibrate --out)'));
}

function revived(file: CalibrationFile): Calibration {
  const { name, source, grid, matrix, standards, findings, provenance } = file;
  return {
    name,
    source,
    grid,
    matrix,
    pairs: file.pairs.map((pair): PairCalibration => ({
      ...(pair as unknown as PairCalibration),
      model: {
        ...(pair.model as unknown as PairCalibration['model']),
        wavelength: Float64Array.from(pair.model.wavelength),
        spectra: pair.model.spectra.map((row) => Float64Array.from(row)),
        modes: pair.model.modes.map((row) => Float64Array.from(row)),
        designInverse: Float64Array.from(pair.model.designInverse),
      },
      design: { ...pair.design, condition: pair.design.condition ?? Infinity },
    })),
    standards: standards as unknown as Calibration['standards'],
    findings,
    provenance,
  };
}
