import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { brokenAt } from '../../src/json/brokenAt.ts';

describe('brokenAt', () => {
  test.each([
    ['', 0],
    ['  ', 2],
    ['{"a":x}', 5],
    ['{"a" 1}', 5],
    ['{"a":1,}', 7],
    ['[1,]', 3],
    ['[1 2]', 3],
    ['{a:1}', 1],
    ['[01]', 2],
    ['[1.]', 2],
    ['["tab\there"]', 1],
    ['["\\x"]', 1],
    ['{"a":1} {', 8],
    ['[tru', 1],
    ['{"a":[1,2', 9],
    ['[NaN]', 1],
  ])('%j breaks at %i', (text, at) => {
    expect(() => JSON.parse(text)).toThrow(SyntaxError);
    expect(brokenAt(text)).toBe(at);
  });

  test('a text that JSON.parse takes does not break before its end', () => {
    fc.assert(fc.property(fc.json(), (text) => brokenAt(text) === text.length));
    fc.assert(
      fc.property(fc.jsonValue(), (value) => {
        const text = JSON.stringify(value, null, 2);
        return brokenAt(text) === text.length;
      }),
    );
  });

  test('what stands before the break can be continued to JSON; the break itself cannot', () => {
    const cutOff = fc.tuple(fc.json(), fc.nat()).map(([text, cut]) => text.slice(0, cut % text.length));
    fc.assert(
      fc.property(cutOff, (text) => {
        fc.pre(!isJson(text));
        // Only the end is missing, so the break lies at the end or at the start of the token that is cut.
        const rest = text.slice(brokenAt(text));
        expect(rest).toMatch(/^("[\s\S]*|-?[\d.eE+-]*|t(ru?)?|f(a(ls?)?)?|n(ul?)?)$/);
      }),
    );
  });
});

function isJson(text: string): boolean {
  try {
    JSON.parse(text);
    return true;
  } catch {
    return false;
  }
}
