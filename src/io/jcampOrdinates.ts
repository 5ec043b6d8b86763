// What        Ordinates of JCAMP-DX tables in every ASDF form: fixed, packed (PAC), squeezed (SQZ), difference (DIF), duplicate (DUP).
// Equation    DIF: y_i = y_(i−1) + d; DUP n: the last value or the last difference stands n times in all.
// Why so      Each line is decoded by itself and its abscissa checked; after a line that ends in difference form the next line's first
//             ordinate repeats the last one and is a check, not a point. A reader that does not check stretches spectra in silence.
//             An exponent needs its sign (1.0E+01): without, E5 is the squeezed 55.
// Valid for   (X++(Y..Y)); `?` is a missing ordinate.
// Units       integers as written, before YFACTOR.
// Source      McDonald, Wilks, Appl. Spectrosc. 1988, 42, 151, sections 5.2 to 5.11 (protocol 4.24).
import { quoted } from '../errors.ts';

const POSITIVE_SQUEEZED = '@ABCDEFGHI';
const NEGATIVE_SQUEEZED = 'abcdefghi';
const POSITIVE_DIFFERENCE = '%JKLMNOPQR';
const NEGATIVE_DIFFERENCE = 'jklmnopqr';
const DUPLICATE = 'STUVWXYZs';

const NUMBER = String.raw`(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]\d{1,3})?`;
const ABSCISSA = new RegExp(`^[+-]?${NUMBER}`);
const TOKEN = new RegExp(String.raw`[@A-Ia-i%J-Rj-rS-Zs]\d*|\?|[+-]?${NUMBER}`, 'g');

export interface DecodedLine {
  /** abscissa as written */
  readonly x: number;
  /** NaN where missing; the first is a check value when the line before ended in difference form */
  readonly ordinates: number[];
  readonly endsInDifference: boolean;
}

/** The signed number behind a pseudo-digit, null where the token begins otherwise. */
function digitIn(token: string, positive: string, negative: string): number | null {
  const plus = positive.indexOf(token[0]!);
  if (plus >= 0) return Number(`${plus}${token.slice(1)}`);
  const minus = negative.indexOf(token[0]!);
  return minus >= 0 ? -Number(`${minus + 1}${token.slice(1)}`) : null;
}

/** @returns the decoded line, or in words what it holds that no form has */
export function decodeLine(line: string): DecodedLine | { readonly unreadable: string } {
  const text = line.trim();
  const abscissa = ABSCISSA.exec(text)?.[0];
  if (abscissa === undefined) return { unreadable: quoted(text) };
  const body = text.slice(abscissa.length);
  const unread = body.replace(TOKEN, '').replace(/[\s,;]/g, '');
  if (unread) return { unreadable: quoted(unread) };
  const ordinates: number[] = [];
  let difference: number | null = null;
  for (const [token] of body.matchAll(TOKEN)) {
    const last = ordinates.at(-1);
    if (DUPLICATE.includes(token[0]!)) {
      if (last === undefined) return { unreadable: `a repeat, ${token}, of nothing` };
      const count = Number(`${DUPLICATE.indexOf(token[0]!) + 1}${token.slice(1)}`);
      for (let i = 1; i < count; i++) ordinates.push(ordinates.at(-1)! + (difference ?? 0));
      continue;
    }
    difference = digitIn(token, POSITIVE_DIFFERENCE, NEGATIVE_DIFFERENCE);
    if (difference !== null) {
      if (last === undefined) return { unreadable: `a difference, ${token}, from nothing` };
      ordinates.push(last + difference);
    } else if (token === '?') ordinates.push(NaN);
    else ordinates.push(digitIn(token, POSITIVE_SQUEEZED, NEGATIVE_SQUEEZED) ?? Number(token));
  }
  return { x: Number(abscissa), ordinates, endsInDifference: difference !== null };
}
