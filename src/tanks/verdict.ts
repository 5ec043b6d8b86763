// What        One word for the state of a plant.
// Equation    the first rule that applies: exchanged, undecided, hidden / shifted-and-oxidised / over-reduced (X and M present), oxidised /
//             over-reduced (X alone), shifted (M alone), in-balance, watch.
// Why so      A fault is present when it exceeds both its watch limit and U. Asking that the whole interval lie inside watch would fail every
//             plant: ordinary U of the mean oxidation state is 0.021.
// Valid for   plants judged against M₀, the shift they were filled with.
// Units       mol.
// Source      common practice, no source.
import type { Estimate, Imbalance } from './imbalance.ts';
import { isPresent, standing, type Limits, type Standing } from './limits.ts';

export const VERDICTS = [
  'in-balance',
  'watch',
  'shifted',
  'oxidised',
  'over-reduced',
  'shifted-and-oxidised',
  'hidden',
  'exchanged',
  'undecided',
] as const;
export type Verdict = (typeof VERDICTS)[number];

export interface Judged {
  readonly watch: Standing;
  readonly act: Standing;
}

export interface Judgement {
  readonly verdict: Verdict;
  readonly judged: Readonly<Record<'netOxidation' | 'vanadiumShift' | 'chargeOffset', Judged>>;
  readonly present: Readonly<Record<'netOxidation' | 'vanadiumShift' | 'chargeOffset', boolean>>;
}

/** @param designShift M₀, mol */
export function judge(imbalance: Imbalance, limits: Limits, designShift: number): Judgement {
  const total = imbalance.totalVanadium.value;
  const X = less(imbalance.netOxidation, designShift);
  const M = less(imbalance.vanadiumShift, designShift);
  const delta = imbalance.chargeOffset;
  const oxidation = { watch: limits.oxidation.watch * total, act: limits.oxidation.act * total };
  const shift = { watch: (limits.shift.watch * total) / 2, act: (limits.shift.act * total) / 2 };
  const judged = {
    netOxidation: judgedBy(X, oxidation),
    vanadiumShift: judgedBy(M, shift),
    chargeOffset: judgedBy(delta, shift),
  };
  const present = {
    netOxidation: isPresent(X, oxidation.watch),
    vanadiumShift: isPresent(M, shift.watch),
    chargeOffset: isPresent(delta, shift.watch),
  };
  const tooWide = 2 * X.uncertainty > oxidation.act || 2 * M.uncertainty > shift.act;
  const nothing = !present.netOxidation && !present.vanadiumShift;
  return { verdict: verdictOf(), judged, present };

  function verdictOf(): Verdict {
    if (tooWide && nothing) return 'undecided';
    if (present.netOxidation && present.vanadiumShift) {
      if (!present.chargeOffset) return 'hidden';
      return X.value > 0 ? 'shifted-and-oxidised' : 'over-reduced';
    }
    if (present.netOxidation) return X.value > 0 ? 'oxidised' : 'over-reduced';
    if (present.vanadiumShift) return 'shifted';
    const actPossible = Object.values(judged).some((one) => one.act !== 'within');
    return !present.chargeOffset && !actPossible ? 'in-balance' : 'watch';
  }
}

const less = (estimate: Estimate, by: number): Estimate => ({
  value: estimate.value - by,
  uncertainty: estimate.uncertainty,
});

const judgedBy = (estimate: Estimate, limit: { watch: number; act: number }): Judged => ({
  watch: standing(estimate, limit.watch),
  act: standing(estimate, limit.act),
});
