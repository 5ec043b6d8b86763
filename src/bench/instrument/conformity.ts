// What        Whether a measured quantity keeps its limits when its uncertainty is taken into account.
// Equation    guard band w = 1.96 u (95 %, k = 1 inside): `passed` if low + w ≤ y ≤ high − w; `failed` if y < low − w or y > high + w;
//             else `undecided`. Probability of conformity p = Φ((high − y)/u) − Φ((low − y)/u).
// Why so      a bare comparison calls a coin toss a pass. Three answers: an undecided test is repeated or measured better, not believed.
// Valid for   normal uncertainty; a limit may be missing on one side (−∞ or ∞).
// Units       those of the quantity.
// Source      JCGM 106:2012, 7 (conformance probability) and 8.3 (guarded acceptance and rejection).
import { normalCdf } from '../../numerics/distributions.ts';

export type Conformity = 'passed' | 'undecided' | 'failed';

export interface ConformityAnswer {
  readonly conformity: Conformity;
  /** probability that the true value lies within the limits */
  readonly probability: number;
}

const GUARD = 1.96;

/**
 * @param value measured
 * @param uncertainty standard uncertainty (k = 1), 0 or more
 * @param limits [low, high], each possibly infinite
 */
export function judgeConformity(
  value: number,
  uncertainty: number,
  [low, high]: readonly [number, number],
): ConformityAnswer {
  const guard = GUARD * uncertainty;
  const probability =
    uncertainty > 0
      ? normalCdf((high - value) / uncertainty) - normalCdf((low - value) / uncertainty)
      : Number(value >= low && value <= high);
  if (value >= low + guard && value <= high - guard) return { conformity: 'passed', probability };
  if (value < low - guard || value > high + guard) return { conformity: 'failed', probability };
  return { conformity: 'undecided', probability };
}

/** Several tests together: failed if one failed, passed if all passed. */
export function worstConformity(all: readonly Conformity[]): Conformity {
  if (all.includes('failed')) return 'failed';
  return all.includes('undecided') || all.length === 0 ? 'undecided' : 'passed';
}
