import * as v from 'valibot';
import { quoted, TankhueError, TankhueErrors } from '../errors.ts';

/** A number JSON can hold: no Infinity (`1e999` reads as that), no NaN. */
export const finiteNumber = v.pipe(v.number(), v.finite('expected a finite number'));
/** A standard uncertainty or a standard deviation. */
export const notNegative = v.pipe(finiteNumber, v.minValue(0, 'expected 0 or more'));
export const finding = v.object({
  code: v.string(),
  severity: v.picklist(['note', 'caution', 'withhold']),
  message: v.string(),
  hint: v.string(),
});
export const measured = v.object({ value: finiteNumber, uncertainty: notNegative });

/**
 * Reads JSON that must have a given shape. Fields nobody asks for are let through, because shapes only grow.
 * @param what what the file should be, e.g. `an instrument record (tankhue verify --out)`
 * @throws TankhueErrors with every problem and its JSON path: `json-broken`, `field-wrong`
 */
export function readStrictJson<Schema extends v.GenericSchema>(
  schema: Schema,
  text: string,
  file: string,
  what: string,
): v.InferOutput<Schema> {
  let data: unknown;
  try {
    data = JSON.parse(text);
  } catch (error) {
    throw new TankhueError(
      'json-broken',
      `expected JSON; received ${quoted(text.trimStart())}: ${(error as Error).message}`,
      file,
      `name a file that holds ${what}`,
    );
  }
  const result = v.safeParse(schema, data);
  if (result.success) return result.output;
  const problems = result.issues.map(
    (issue) =>
      new TankhueError(
        'field-wrong',
        `expected ${expectation(issue)}; received ${issue.received}`,
        `${file} ${jsonPath(issue)}`,
        `name a file that holds ${what}, as it was written`,
      ),
  );
  throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
}

const expectation = (issue: v.BaseIssue<unknown>): string =>
  issue.message.startsWith('expected ') ? issue.message.slice('expected '.length) : (issue.expected ?? 'another value');

const jsonPath = (issue: v.BaseIssue<unknown>): string =>
  (issue.path ?? []).reduce(
    (path, { key }) => (typeof key === 'number' ? `${path}[${key}]` : `${path}.${String(key)}`),
    '$',
  );
