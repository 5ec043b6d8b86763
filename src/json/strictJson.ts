import * as v from 'valibot';
import { quoted, TankhueError, TankhueErrors } from '../errors.ts';
import { brokenAt } from './brokenAt.ts';

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
 * Reads JSON that must have a given shape.
 * @param what what the file should be, e.g. `an instrument record (tankhue verify --out)`
 * @throws TankhueError `json-broken` with line and column, `wrong-schema`; TankhueErrors with every problem and its JSON path:
 * `field-missing`, `field-unknown` (strict objects), `not-finite`, `field-wrong`
 */
export function readStrictJson<Schema extends v.GenericSchema>(
  schema: Schema,
  text: string,
  file: string,
  what: string,
): v.InferOutput<Schema> {
  const data = parseJson(text, file, what);
  const result = v.safeParse(schema, data);
  if (result.success) return result.output;
  // A file of another kind has every field wrong; that it is another kind is all there is to say.
  const otherKind = result.issues.filter(isOtherSchema);
  const issues =
    otherKind.length > 0 ? otherKind : [...result.issues, ...furtherUnknownFields(schema, data, result.issues)];
  const hint = `name a file that holds ${what}, as it was written`;
  throw new TankhueErrors(problemsOf(issues, file, hint) as [TankhueError, ...TankhueError[]]);
}

/** @throws TankhueError `json-broken` */
function parseJson(text: string, file: string, what: string): unknown {
  const json = text.replace(/^\uFEFF/, '');
  try {
    return JSON.parse(json) as unknown;
  } catch {
    const position = brokenAt(json);
    const before = json.slice(0, position).split('\n');
    const [rest] = json.slice(position).split('\n', 1);
    throw new TankhueError(
      'json-broken',
      `expected JSON to its end; received ${rest!.trim() === '' ? 'the end of the file' : quoted(rest!)}`,
      `${file}:${before.length}:${before.at(-1)!.length + 1}`,
      `name a file that holds ${what}; it may have been cut off or edited`,
    );
  }
}

const isOtherSchema = (issue: v.BaseIssue<unknown>): boolean =>
  jsonPath(issue) === '$.schema' && !isUnknownField(issue);
const isUnknownField = (issue: v.BaseIssue<unknown>): boolean =>
  issue.type === 'strict_object' && issue.expected === 'never';
const isMissingField = (issue: v.BaseIssue<unknown>): boolean =>
  issue.received === 'undefined' && issue.expected === `"${String(issue.path?.at(-1)?.key)}"`;

/** An object names its first unknown field only; the next shows when that one is gone. */
function furtherUnknownFields(
  schema: v.GenericSchema,
  data: unknown,
  first: readonly v.BaseIssue<unknown>[],
): v.BaseIssue<unknown>[] {
  const further: v.BaseIssue<unknown>[] = [];
  const copy = structuredClone(data);
  for (let unknown = first.filter(isUnknownField); unknown.length > 0;) {
    for (const { path } of unknown) removeAt(copy, path!);
    unknown = (v.safeParse(schema, copy).issues ?? []).filter(isUnknownField);
    further.push(...unknown);
  }
  return further;
}

type Fields = Record<PropertyKey, unknown>;

function removeAt(data: unknown, path: readonly v.IssuePathItem[]): void {
  const parent = path.slice(0, -1).reduce((at, { key }) => (at as Fields)[key as PropertyKey], data);
  delete (parent as Fields)[path.at(-1)!.key as PropertyKey];
}

/** Problems that differ in nothing but an index are told once and counted. */
function problemsOf(issues: readonly v.BaseIssue<unknown>[], file: string, hint: string): TankhueError[] {
  const groups = new Map<string, v.BaseIssue<unknown>[]>();
  for (const issue of issues) {
    const key = `${codeOf(issue)} ${expectationOf(issue)} ${jsonPath(issue).replace(/\[\d+\]/g, '[]')}`;
    groups.set(key, [...(groups.get(key) ?? []), issue]);
  }
  return [...groups.values()].map(([issue, ...alike]) => {
    const more = alike.length > 0 ? `; ${alike.length} more ${alike.length === 1 ? 'is' : 'are'} alike` : '';
    return new TankhueError(
      codeOf(issue!),
      `expected ${expectationOf(issue!)}; received ${receivedBy(issue!)}`,
      `${file} ${jsonPath(issue!)}`,
      `${hint}${more}`,
    );
  });
}

function codeOf(issue: v.BaseIssue<unknown>): string {
  if (isOtherSchema(issue)) return 'wrong-schema';
  if (isUnknownField(issue)) return 'field-unknown';
  if (isMissingField(issue)) return 'field-missing';
  const noNumber = issue.type === 'number' && (issue.received === 'null' || issue.received === 'NaN');
  return issue.type === 'finite' || noNumber ? 'not-finite' : 'field-wrong';
}

function expectationOf(issue: v.BaseIssue<unknown>): string {
  if (isUnknownField(issue)) return 'no field of this name';
  if (isMissingField(issue)) return `the field ${issue.expected}`;
  if (issue.message.startsWith('expected ')) return issue.message.slice('expected '.length);
  return issue.expected?.replace(/^(Object|Array)$/, (word) => `an ${word.toLowerCase()}`) ?? 'another value';
}

function receivedBy({ received }: v.BaseIssue<unknown>): string {
  if (received === 'undefined') return 'nothing';
  const text = /^"([\s\S]*)"$/.exec(received)?.[1];
  return text === undefined ? received : quoted(text);
}

const jsonPath = (issue: v.BaseIssue<unknown>): string =>
  (issue.path ?? []).reduce(
    (path, { key }) => (typeof key === 'number' ? `${path}[${key}]` : `${path}.${String(key)}`),
    '$',
  );
