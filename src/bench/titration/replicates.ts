import type { Finding } from '../../finding.ts';
import { chiSquareSurvival } from '../../numerics/distributions.ts';

/** Scatter that chance explains in fewer than 1 of 100 cases [practice]. */
const LIMIT = 0.01;

/** @param birgeRatio observed over expected scatter of `count` replicates */
export function replicatesDisagree(birgeRatio: number, count: number, what: string): Finding[] {
  const surprise = count > 1 ? chiSquareSurvival(birgeRatio ** 2 * (count - 1), count - 1) : 1;
  if (surprise >= LIMIT) return [];
  return [
    {
      code: 'replicates-disagree',
      severity: 'caution',
      message: `${count} ${what} scatter ${birgeRatio.toFixed(1)} times as much as their uncertainties allow; the scatter is in the result`,
      hint: 'look for the run that slipped, and do a third one',
    },
  ];
}
