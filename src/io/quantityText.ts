import { TankhueError, quoted } from '../errors.ts';
import { centimetresFromMillimetres, kelvinFromCelsius } from '../units.ts';

const WITH_UNIT = /^\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S*)\s*$/;

function split(text: string, what: string, where: string, hint: string): { value: number; unit: string } {
  const match = WITH_UNIT.exec(text);
  if (!match) throw new TankhueError('not-a-number', `expected ${what}; received ${quoted(text)}`, where, hint);
  const value = Number(match[1]);
  if (!Number.isFinite(value))
    throw new TankhueError('not-a-number', `expected ${what}; received ${quoted(text)}`, where, hint);
  // Greek mu and the micro sign look alike and come from different keyboards.
  return { value, unit: match[2]!.replace('μ', 'µ') };
}

/** `1mm`, `0.1 cm` → cm. @throws TankhueError `unit-missing`, `unit-unknown`, `out-of-range` */
export function parseLength(text: string, where: string): number {
  const hint = 'write 1mm or 1cm';
  const { value, unit } = split(text, 'a path length with its unit', where, hint);
  if (unit === '')
    throw new TankhueError(
      'unit-missing',
      `expected a path length with its unit; received ${quoted(text)}`,
      where,
      hint,
    );
  if (unit !== 'mm' && unit !== 'cm')
    throw new TankhueError('unit-unknown', `expected mm or cm; received ${quoted(unit)}`, where, hint);
  if (!(value > 0))
    throw new TankhueError('out-of-range', `expected a length above 0; received ${quoted(text)}`, where, hint);
  return unit === 'mm' ? centimetresFromMillimetres(value) : value;
}

/** `25`, `25C`, `25 °C`, `298 K` → K; a bare number is °C, as on sheets. @throws TankhueError `unit-unknown`, `out-of-range` */
export function parseTemperature(text: string, where: string): number {
  const { value, unit } = split(text, 'a temperature', where, 'write 25C or 298K');
  const kelvin = unit === 'K' ? value : kelvinFromCelsius(value);
  if (!['', 'C', '°C', 'K'].includes(unit))
    throw new TankhueError('unit-unknown', `expected °C or K; received ${quoted(unit)}`, where, 'write 25C or 298K');
  if (!(kelvin > 250 && kelvin < 380))
    throw new TankhueError(
      'out-of-range',
      `expected -20 to 100 °C; received ${quoted(text)}`,
      where,
      'write the temperature of the cuvette',
    );
  return kelvin;
}

/** A dilution, tank over cuvette, 1 or more. @throws TankhueError `out-of-range` */
export function parseDilution(text: string, where: string): number {
  const { value, unit } = split(text, 'a dilution factor', where, 'write 20 for 1 mL made up to 20 mL');
  if (unit !== '' && unit !== '×' && unit !== 'x')
    throw new TankhueError(
      'unit-unknown',
      `expected a plain factor; received ${quoted(text)}`,
      where,
      'write 20 for 1 mL made up to 20 mL',
    );
  if (!(value >= 1))
    throw new TankhueError(
      'out-of-range',
      `expected a dilution of 1 or more; received ${quoted(text)}`,
      where,
      'write 20 for 1 mL made up to 20 mL, 1 for undiluted',
    );
  return value;
}

/** A plain number above a limit, with an optional unit word that must be the given one. @throws TankhueError */
export function parsePositive(text: string, unitWord: string, where: string): number {
  const { value, unit } = split(text, `a number of ${unitWord}`, where, `write for example 5 ${unitWord}`);
  if (unit !== '' && unit !== unitWord)
    throw new TankhueError(
      'unit-unknown',
      `expected ${unitWord}; received ${quoted(unit)}`,
      where,
      `write for example 5 ${unitWord}`,
    );
  if (!(value > 0))
    throw new TankhueError(
      'out-of-range',
      `expected more than 0 ${unitWord}; received ${quoted(text)}`,
      where,
      `write for example 5 ${unitWord}`,
    );
  return value;
}

/**
 * A number that must carry one of the given units, multiplied by that unit's size; `''` among them lets a bare number through.
 * @param example what to write instead, e.g. `2mA`
 * @throws TankhueError `not-a-number`, `unit-missing`, `unit-unknown`
 */
export function parseInUnits(
  text: string,
  what: string,
  units: Readonly<Record<string, number>>,
  example: string,
  where: string,
): number {
  const hint = `write for example ${example}`;
  const { value, unit } = split(text, what, where, hint);
  const size = Object.hasOwn(units, unit) ? units[unit] : undefined;
  if (size !== undefined) return value * size;
  const names = Object.keys(units).filter((name) => name !== '');
  throw new TankhueError(
    unit === '' ? 'unit-missing' : 'unit-unknown',
    unit === ''
      ? `expected ${what} with its unit (${names.join(', ')}); received ${quoted(text)}`
      : `expected ${names.join(' or ')}; received ${quoted(unit)}`,
    where,
    hint,
  );
}

/** `V3` or `3.5`: a mean oxidation state of 2 to 5. @throws TankhueError `out-of-range` */
export function parseOxidationState(text: string, where: string): number {
  const value = Number(text.trim().replace(/^V/i, ''));
  if (value >= 2 && value <= 5) return value;
  throw new TankhueError(
    'out-of-range',
    `expected V2, V3, V4, V5 or a mean oxidation state of 2 to 5; received ${quoted(text)}`,
    where,
    'write V3, or 3.5 for equal parts of V(III) and V(IV)',
  );
}
