// What        Whether a titration and an assay of one sample agree.
// Equation    E_n = (x − y)/√(U²(x) + U²(y)), U = 2u; they agree where |E_n| ≤ 1.
// Why so      both carry their own budgets and share no cause of error, so the difference is judged against both together.
// Valid for   independent results of the same portion; two results that are both poor agree too easily, so U is printed beside.
// Units       none.
// Source      ISO 13528, E_n score.
import type { AssayNumbers, AssayResult, Quantity } from '../../assay/result.ts';
import type { Agreement } from './titrationResult.ts';

/** What is needed of an assay: its sample and its numbers. */
export type ComparedAssay = Pick<AssayResult, 'sample' | 'system' | 'pair'> &
  Pick<AssayNumbers, 'totalVanadium' | 'averageOxidationState' | 'stateOfCharge'>;

const COVERAGE = 2;

export function normalisedError(a: Quantity, b: Quantity): number | null {
  if (a.value === null || b.value === null || a.uncertainty === null || b.uncertainty === null) return null;
  return (a.value - b.value) / (COVERAGE * Math.hypot(a.uncertainty, b.uncertainty));
}

export function agreementWith(numbers: AssayNumbers, assay: ComparedAssay): Agreement[] {
  return (['stateOfCharge', 'averageOxidationState', 'totalVanadium'] as const).flatMap((quantity): Agreement[] => {
    const pick = ({ value, uncertainty }: Quantity): Quantity => ({ value, uncertainty });
    const En = normalisedError(numbers[quantity], assay[quantity]);
    if (En === null) return [];
    return [
      {
        quantity,
        titration: pick(numbers[quantity]),
        assay: pick(assay[quantity]),
        En,
        agrees: Math.abs(En) <= 1,
      },
    ];
  });
}
