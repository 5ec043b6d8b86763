import type { Judged } from '../tanks/verdict.ts';

/** How a quantity lies to its two limits, always with the noun: a bare "possible" is read both ways. */
export function standingText({ watch, act }: Judged): string {
  if (act === 'clear') return 'clearly past the act limit';
  if (watch === 'clear')
    return act === 'possible' ? 'clearly past watch, may be past act' : 'clearly past the watch limit';
  if (act === 'possible') return 'may be past the act limit';
  return watch === 'possible' ? 'may be past the watch limit' : 'within the watch limit';
}
