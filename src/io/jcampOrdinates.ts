// What        Ordinates of JCAMP-DX tables in every ASDF form: fixed, packed (PAC), squeezed (SQZ), difference (DIF), duplicate (DUP).
// Equation    DIF: y_i = y_(i−1) + d; DUP n: the last value or the last difference stands n times in all.
// Why so      Each line is decoded by itself and its abscissa checked; after a line that ends in difference form the next line's first
//             ordinate repeats the last one and is a check, not a point. A reader that does not check stretches spectra in silence.
// Valid for   (X++(Y..Y)); `?` is a missing ordinate.
// Units       integers as written, before YFACTOR.
// Source      McDonald, Wilks, Appl. Spectrosc. 1988, 42, 151, sections 5.2 to 5.11 (protocol 4.24).

const POSITIVE_SQUEEZED = '@ABCDEFGHI';
const NEGATIVE_SQUEEZED = 'abcdefghi';
const POSITIVE_DIFFERENCE = '%JKLMNOPQR';
const NEGATIVE_DIFFERENCE = 'jklmnopqr';
const DUPLICATE = 'STUVWXYZs';

const TOKEN = /[@A-Ia-i%J-Rj-rS-Zs][0-9]*|\?|[+-]?(?:\d+\.?\d*|\.\d+)(?:E[+-]?\d+)?/g;

export interface DecodedLine {
  /** abscissa as written */
  readonly x: number;
  /** NaN where missing; the first is a check value when the line before ended in difference form */
  readonly ordinates: number[];
  readonly endsInDifference: boolean;
}

/** @returns null where the line holds characters that no form has, with the rest for the message */
export function decodeLine(line: string): DecodedLine | { rest: string } {
  const text = line.trim();
  const abscissa = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:E[+-]?\d+(?=[\s@A-Za-z%?+-]))?/.exec(text);
  if (!abscissa) return { rest: text };
  const body = text.slice(abscissa[0].length);
  const unread = body.replace(TOKEN, '').replace(/[\s,;]/g, '');
  if (unread) return { rest: unread };
  const ordinates: number[] = [];
  let lastDifference: number | null = null;
  for (const [token] of body.matchAll(TOKEN)) {
    const head = token[0]!;
    if (DUPLICATE.includes(head)) {
      const count = Number(`${DUPLICATE.indexOf(head) + 1}${token.slice(1)}`);
      for (let i = 1; i < count; i++) ordinates.push((ordinates.at(-1) ?? NaN) + (lastDifference ?? 0));
      continue;
    }
    const difference = digitIn(token, POSITIVE_DIFFERENCE, NEGATIVE_DIFFERENCE);
    lastDifference = difference;
    if (difference !== null) ordinates.push((ordinates.at(-1) ?? NaN) + difference);
    else if (head === '?') ordinates.push(NaN);
    else ordinates.push(digitIn(token, POSITIVE_SQUEEZED, NEGATIVE_SQUEEZED) ?? Number(token));
  }
  return { x: Number(abscissa[0]), ordinates, endsInDifference: lastDifference !== null };
}

/** The signed number behind a pseudo-digit, null where the token begins otherwise. */
function digitIn(token: string, positive: string, negative: string): number | null {
  const plus = positive.indexOf(token[0]!);
  if (plus >= 0) return Number(`${plus}${token.slice(1)}`);
  const minus = negative.indexOf(token[0]!);
  return minus >= 0 ? -Number(`${minus + 1}${token.slice(1)}`) : null;
}
