import type { AssayNumbers } from '../../assay/result.ts';
import type { Pair } from '../../electrolyte/species.ts';
import type { Finding } from '../../finding.ts';
import type { SampleRun } from './titrationRun.ts';

/** Limits [practice]: standard uncertainty of the mean oxidation state, which is that of the state of charge. */
const UNCERTAIN = { caution: 0.02, withhold: 0.05 } as const;

/** What the numbers and the sheet of a sample say against each other. */
export function sampleFindings(run: SampleRun, pair: Pair | null, numbers: AssayNumbers, runs: number): Finding[] {
  const findings: Finding[] = [];
  const u = numbers.averageOxidationState.uncertainty;
  if (u !== null && u > UNCERTAIN.caution)
    findings.push({
      code: 'too-uncertain',
      severity: u > UNCERTAIN.withhold ? 'withhold' : 'caution',
      message: `state of charge is known to ${(100 * u).toFixed(1)} points only`,
      hint: 'more titrant per step: a larger aliquot or a weaker titrant; smaller additions at the jumps',
    });
  if (pair === 'V2/V3' && run.inertGas !== true)
    findings.push({
      code: 'air-exposure',
      severity: 'caution',
      message: `V(II) was titrated ${run.inertGas === false ? 'in air' : 'without a word of inert gas on the sheet'}: what air took reads as V(III)`,
      hint: 'nitrogen or argon from the first drop; write inert_gas yes',
    });
  const { value, uncertainty } = numbers.stateOfCharge;
  if (value !== null && uncertainty !== null && value + 2 * uncertainty < 0)
    findings.push({
      code: 'over-discharged',
      severity: 'caution',
      message: `state of charge ${(100 * value).toFixed(1)} % is below zero: the side holds ${run.side === 'negative' ? 'V(IV)' : 'V(III)'}`,
      hint: 'real, if sides are not exchanged: charge gently before judging the balance',
    });
  if (runs === 1)
    findings.push({
      code: 'single-run',
      severity: 'note',
      message: 'one titration: slips of pipette or reading would not show',
      hint: 'titrate a second portion',
    });
  return findings;
}
