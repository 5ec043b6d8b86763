import { existsSync, readFileSync } from 'node:fs';
import { expect } from 'vitest';

const FOLDER = '../shared/references';

/** Published numbers lie beside the repository and are not part of it; tests that need them are skipped without. */
export const HAS_REFERENCES = existsSync(FOLDER);
export const WITHOUT_REFERENCES = '(skipped without ../shared/references)';

// The files are of many shapes; each test reads the fields it knows.
// oxlint-disable-next-line typescript/no-explicit-any
export const published = (file: string): any => JSON.parse(readFileSync(`${FOLDER}/${file}.json`, 'utf8'));

/** One example of a file by the beginning of its name. */
// oxlint-disable-next-line typescript/no-explicit-any
export function example(file: string, name: string): any {
  const found = published(file).examples.find((each: { name: string }) => each.name.startsWith(name));
  expect(found, `${name} in ${file}`).toBeDefined();
  return found;
}

/** Decimal digits to which two numbers agree; the least over a list. */
export const digits = (found: readonly number[], expected: readonly number[]): number => {
  expect(found.length).toBe(expected.length);
  return Math.min(
    ...found.map((value, i) => {
      const off = Math.abs(expected[i] === 0 ? value : value / expected[i]! - 1);
      return Number.isNaN(off) ? -Infinity : -Math.log10(Math.max(off, 1e-16));
    }),
  );
};

/** Passes when `found` is `expected` to a relative difference; says both and the difference. */
export function expectRelative(found: number, expected: number, tolerance: number): void {
  const off = Math.abs(found / expected - 1);
  expect(off, `${found} against ${expected}`).toBeLessThanOrEqual(tolerance);
}

/** Passes when `found` rounds to the printed figure: within half a unit of its last digit. */
export function expectPrinted(found: number, printed: number, decimals: number): void {
  expect(Math.abs(found - printed), `${found} against the printed ${printed}`).toBeLessThanOrEqual(
    0.5000001 * 10 ** -decimals,
  );
}
