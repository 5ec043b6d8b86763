import type { DriftOf } from '../tanks/drift.ts';
import { quantityText } from './quantityText.ts';

const day = (time: number): string => new Date(time).toISOString().slice(0, 10);

/** `12.1 ± 2.0 mol a month; act limit about 2026-11-02, not before 2026-08-17` */
export function driftText({ rate, actAt, notBefore }: DriftOf): string {
  const expected = actAt === null ? 'no certain drift' : `act limit about ${day(actAt)}`;
  return `${quantityText(rate.value, rate.uncertainty)} mol a month; ${expected}, not before ${notBefore === null ? 'ever' : day(notBefore)}`;
}
