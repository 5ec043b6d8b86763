import * as v from 'valibot';
import { TankhueError, TankhueErrors, quoted } from '../errors.ts';
import { stoichiometryIn } from '../electrolyte/association.ts';
import type { Calibration, PairCalibration } from './calibration.ts';
import { calibrationSchema, type CalibrationFile } from './schema.ts';

/** The text of `tankhue/calibration/1`: same calibration, same bytes; `parseCalibration` gives back exactly what was written. */
export function serialiseCalibration(calibration: Calibration): string {
  const file = {
    schema: 'tankhue/calibration/1',
    ...calibration,
    pairs: calibration.pairs.map((pair) => ({
      ...pair,
      design: { ...pair.design, condition: Number.isFinite(pair.design.condition) ? pair.design.condition : null },
    })),
  };
  const plain = JSON.stringify(
    file,
    (_, value: unknown) => (value instanceof Float64Array ? Array.from(value) : value),
    1,
  );
  // One line for each array of numbers: a person can page through the file and a comparison of two stays readable.
  return `${plain.replace(/\[\s+([-\d][-\d.eE+,\s]*?)\s+\]/g, (_, numbers: string) => `[${numbers.replace(/\s+/g, '')}]`)}\n`;
}

/**
 * Reads `tankhue/calibration/1` strictly.
 * @param where file name, for messages
 * @throws TankhueError(s) `json-broken`, `wrong-schema`, `field-wrong` with the JSON path, all at once
 */
export function parseCalibration(text: string, where = 'calibration'): Calibration {
  const raw = parseJson(text, where);
  const result = v.safeParse(calibrationSchema, raw);
  if (!result.success) {
    const problems = result.issues
      .slice(0, MOST_PROBLEMS)
      .map(
        (issue) =>
          new TankhueError(
            'field-wrong',
            `expected ${issue.expected ?? 'a valid value'}; received ${quoted(issue.received)}`,
            `${where} $${pathOf(issue)}`,
            'build the calibration again; do not mend numbers by hand',
          ),
      );
    throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  }
  const problems = result.output.pairs.flatMap((pair, index) => disagreements(pair, `${where} $.pairs[${index}]`));
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return revived(result.output);
}

const MOST_PROBLEMS = 20;

function pathOf(issue: v.BaseIssue<unknown>): string {
  return (issue.path ?? [])
    .map((item) => (typeof item.key === 'number' ? `[${item.key}]` : `.${String(item.key)}`))
    .join('');
}

function parseJson(text: string, where: string): unknown {
  let raw: unknown;
  try {
    raw = JSON.parse(text);
  } catch (error) {
    const position = Number(/position (\d+)/.exec((error as Error).message)?.[1] ?? text.length);
    const before = text.slice(0, position).split('\n');
    throw new TankhueError(
      'json-broken',
      `expected JSON to its end; received ${quoted(text.slice(position, position + 40) || 'the end of the file')}`,
      `${where}:${before.length}:${before.at(-1)!.length + 1}`,
      'the file is cut off or was edited: copy it again, or build the calibration again',
    );
  }
  const schema = (raw as { schema?: unknown } | null)?.schema;
  if (schema !== 'tankhue/calibration/1')
    throw new TankhueError(
      'wrong-schema',
      `expected "tankhue/calibration/1"; received ${quoted(schema)}`,
      `${where} $.schema`,
      'name a file that tankhue calibrate has written',
    );
  return raw;
}

/** What single fields cannot say: lengths that belong together, an axis that rises, reactants of the pair. */
function disagreements(pair: CalibrationFile['pairs'][number], where: string): TankhueError[] {
  const { model } = pair;
  const count = 2 + model.associations.length;
  const points = model.wavelength.length;
  const problems: TankhueError[] = [];
  const expect = (holds: boolean, expected: string, received: unknown, path: string): void => {
    if (!holds)
      problems.push(
        new TankhueError(
          'field-wrong',
          `expected ${expected}; received ${String(received)}`,
          `${where}.model${path}`,
          'build the calibration again; do not mend numbers by hand',
        ),
      );
  };
  expect(model.pair === pair.pair, `the pair ${pair.pair}`, model.pair, '.pair');
  expect(points >= 2 * count + 2, `at least ${2 * count + 2} wavelengths`, points, '.wavelength');
  expect(
    model.wavelength.every((nm, i) => i === 0 || nm > model.wavelength[i - 1]!),
    'wavelengths that only rise',
    'one that does not',
    '.wavelength',
  );
  expect(model.spectra.length === count, `${count} spectra`, model.spectra.length, '.spectra');
  model.spectra.forEach((row, k) => expect(row.length === points, `${points} values`, row.length, `.spectra[${k}]`));
  model.modes.forEach((row, k) => expect(row.length === points, `${points} values`, row.length, `.modes[${k}]`));
  expect(
    model.designInverse.length === count * count,
    `${count * count} values`,
    model.designInverse.length,
    '.designInverse',
  );
  model.associations.forEach((association, j) => {
    try {
      stoichiometryIn(
        pair.pair,
        association as Calibration['pairs'][number]['model']['associations'][number],
        `${where}.model.associations[${j}]`,
      );
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      problems.push(error);
    }
  });
  return problems;
}

function revived(file: CalibrationFile): Calibration {
  const { schema: _, ...rest } = file;
  return {
    ...rest,
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
  } as Calibration;
}
