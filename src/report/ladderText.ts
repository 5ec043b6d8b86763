import type { Quantity } from '../assay/result.ts';

/** Mean oxidation states, k = 1; null is withheld. */
export interface LadderOfText {
  readonly negative: Quantity;
  readonly positive: Quantity;
}

const LOWEST = 2;
const HIGHEST = 5;
const NARROWEST = 40;

/**
 * The oxidation ladder in plain characters, for terminals and pipes alike: no colour, no control characters.
 * `N` and `P` are the two sides, `n` the mirror image of the negative one about 3.5, `=` a 95 % interval; `P` on `n` is equally charged.
 * Outside 2 to 5 a mark stands at the end as `<` or `>`.
 * @param width columns of the terminal, at least 40
 */
export function ladderText({ negative, positive }: LadderOfText, width = 80): string {
  const cells = Math.max(NARROWEST, Math.floor(width)) - 1;
  const column = (value: number): number => Math.round(((value - LOWEST) / (HIGHEST - LOWEST)) * (cells - 1));
  const mirrored: Quantity = { ...negative, value: negative.value === null ? null : 7 - negative.value };
  const sides = Array<string>(cells).fill(' ');
  const mirror = Array<string>(cells).fill(' ');
  draw(sides, column, negative, 'N', '=');
  draw(sides, column, positive, 'P', '=');
  draw(mirror, column, mirrored, 'n', '-');
  const rail = Array<string>(cells).fill('-');
  const names = Array<string>(cells).fill(' ');
  for (const [value, name] of [
    [2, 'V(II)'],
    [3, 'V(III)'],
    [3.5, '3.5'],
    [4, 'V(IV)'],
    [5, 'V(V)'],
  ] as const) {
    rail[column(value)] = value === 3.5 ? ':' : '|';
    const start = Math.min(cells - name.length, Math.max(0, column(value) - Math.floor(name.length / 2)));
    [...name].forEach((letter, i) => (names[start + i] = letter));
  }
  return [mirror, sides, rail, names].map((row) => row.join('').trimEnd()).join('\n');
}

function draw(
  row: string[],
  column: (value: number) => number,
  { value, uncertainty }: Quantity,
  mark: string,
  line: string,
): void {
  if (value === null) return;
  const last = row.length - 1;
  const inside = (cell: number): number => Math.min(last, Math.max(0, cell));
  const spread = 2 * (uncertainty ?? 0);
  for (let cell = inside(column(value - spread)); cell <= inside(column(value + spread)); cell++) row[cell] = line;
  const cell = column(value);
  if (cell < 0) row[0] = '<';
  else if (cell > last) row[last] = '>';
  else row[cell] = mark;
}
