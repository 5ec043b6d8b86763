// What        How fast a plant drifts, and when a limit will be reached.
// Equation    slope of X (and M) over the visits by Theil and Sen; u(slope) = 1/√Σ w(t − t̄)², w = 1/u²;
//             limit reached after (L − |v|)/slope, not before (L − |v| − 2u)/(slope + 2u(slope)).
// Why so      One spoiled visit must not turn a plan. Below five visits ranks have no interval, so the uncertainty of the slope is always
//             that of the visits' own uncertainties, taken as independent, which is on the safe side where they share a calibration.
// Valid for   two visits or more at least a day apart; a preview, not a record.
// Units       mol per month (30.44 days), dates in ms since 1970.
// Source      Theil 1950, Sen 1968; Student-free because uncertainties are known.
import { theilSenLine } from '../numerics/robustLine.ts';
import type { Estimate } from './imbalance.ts';

export interface DriftOf {
  /** mol per month */
  readonly rate: Estimate;
  /** ms since 1970: when the act limit is expected, and the earliest that 95 % allow; null where the drift leads away from it */
  readonly actAt: number | null;
  readonly notBefore: number | null;
}

export interface Drift {
  readonly visits: number;
  readonly from: number;
  readonly to: number;
  readonly netOxidation: DriftOf;
  readonly vanadiumShift: DriftOf;
}

export interface Visit {
  /** ms since 1970 */
  readonly time: number;
  readonly netOxidation: Estimate;
  readonly vanadiumShift: Estimate;
}

const MONTH = 30.44 * 86_400_000;

/** @param limits act limits of |X| and |M|, mol @returns null below two visits */
export function driftOf(
  visits: readonly Visit[],
  limits: { readonly netOxidation: number; readonly vanadiumShift: number },
): Drift | null {
  const ordered = [...visits].sort((a, b) => a.time - b.time);
  const first = ordered[0];
  const last = ordered.at(-1);
  if (!first || !last || last.time - first.time < 86_400_000) return null;
  const along = (which: 'netOxidation' | 'vanadiumShift'): DriftOf => {
    const months = ordered.map((visit) => (visit.time - last.time) / MONTH);
    const { slope } = theilSenLine(
      months,
      ordered.map((visit) => visit[which].value),
    );
    const weights = ordered.map((visit) => 1 / visit[which].uncertainty ** 2);
    const total = weights.reduce((a, b) => a + b, 0);
    const mean = weights.reduce((sum, w, i) => sum + w * months[i]!, 0) / total;
    const uncertainty = 1 / Math.sqrt(weights.reduce((sum, w, i) => sum + w * (months[i]! - mean) ** 2, 0));
    return {
      rate: { value: slope, uncertainty },
      ...reachedAt(last.time, last[which], { value: slope, uncertainty }, limits[which]),
    };
  };
  return {
    visits: ordered.length,
    from: first.time,
    to: last.time,
    netOxidation: along('netOxidation'),
    vanadiumShift: along('vanadiumShift'),
  };
}

function reachedAt(
  now: number,
  value: Estimate,
  rate: Estimate,
  limit: number,
): { actAt: number | null; notBefore: number | null } {
  // Seen from the side the drift leads to.
  const sign = Math.sign(rate.value) || 1;
  const left = limit - sign * value.value;
  const speed = Math.abs(rate.value);
  const fastest = speed + 2 * rate.uncertainty;
  const after = (distance: number, per: number): number => now + (Math.max(0, distance) / per) * MONTH;
  return {
    actAt: speed > 2 * rate.uncertainty ? after(left, speed) : null,
    notBefore: fastest > 0 ? after(left - 2 * value.uncertainty, fastest) : null,
  };
}
