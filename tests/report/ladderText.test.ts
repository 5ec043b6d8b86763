import { expect, test } from 'vitest';
import { ladderText } from '../../src/report/ladderText.ts';

const of = (value: number | null, uncertainty = 0.01) => ({ value, uncertainty: value === null ? null : uncertainty });
const row = (text: string, n: number): string => text.split('\n')[n]!;

test('equally charged sides: P stands under n, mirror-symmetric about 3.5', () => {
  const text = ladderText({ negative: of(2.4), positive: of(4.6) });
  expect(row(text, 1).indexOf('P')).toBe(row(text, 0).indexOf('n'));
  const [left, right] = [row(text, 1).indexOf('N'), row(text, 1).indexOf('P')];
  expect(left + right).toBe(78);
  expect(row(text, 2).indexOf(':')).toBe(39);
});

test('a positive side that is ahead stands right of the mirror image', () => {
  const text = ladderText({ negative: of(2.6), positive: of(4.6) });
  expect(row(text, 1).indexOf('P')).toBeGreaterThan(row(text, 0).indexOf('n'));
});

test('a wide interval is drawn wide', () => {
  const narrow = row(ladderText({ negative: of(2.4), positive: of(4.6, 0.001) }), 1).split('=').length;
  const wide = row(ladderText({ negative: of(2.4), positive: of(4.6, 0.1) }), 1).split('=').length;
  expect(wide).toBeGreaterThan(narrow + 5);
});

test('outside 2 to 5 the mark stands at the end; a withheld side is not drawn', () => {
  const text = ladderText({ negative: of(1.9), positive: of(null) });
  expect(row(text, 1)[0]).toBe('<');
  expect(text).not.toContain('P');
  expect(row(ladderText({ negative: of(null), positive: of(5.1) }), 1).endsWith('>')).toBe(true);
});

test.each([20, 40, 80, 132])('fits %i columns (40 at least), plain ASCII', (width) => {
  const text = ladderText({ negative: of(2.05, 0.2), positive: of(4.99, 0.2) }, width);
  for (const line of text.split('\n')) expect(line.length).toBeLessThan(Math.max(40, width));
  expect(text).toMatch(/^[\x20-\x7e\n]+$/);
});
