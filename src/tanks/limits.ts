import type { Estimate } from './imbalance.ts';

/** How an interval lies to a limit: clearly past it, straddling it, inside it. */
export type Standing = 'clear' | 'possible' | 'within';

/** @param limit of |value|, same unit */
export function standing(estimate: Estimate, limit: number): Standing {
  const size = Math.abs(estimate.value);
  const expanded = 2 * estimate.uncertainty;
  if (size - expanded > limit) return 'clear';
  return size + expanded <= limit ? 'within' : 'possible';
}

export interface Limits {
  /** of |X − M₀| as a change of the plant's mean oxidation state */
  readonly oxidation: { readonly watch: number; readonly act: number };
  /** of |M − M₀| and |δ| as shares of N/2 */
  readonly shift: { readonly watch: number; readonly act: number };
}

/** Common practice, no source; a plant's sheet may override them. */
export const USUAL_LIMITS: Limits = { oxidation: { watch: 0.02, act: 0.05 }, shift: { watch: 0.03, act: 0.07 } };

/** A fault is present when it is larger than both its watch limit and its expanded uncertainty. */
export const isPresent = (estimate: Estimate, watch: number): boolean =>
  Math.abs(estimate.value) > Math.max(watch, 2 * estimate.uncertainty);
