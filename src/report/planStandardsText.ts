import type { StandardsPlan } from '../calibration/planStandards.ts';
import { speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { romanName } from './assayText.ts';

/** A list to work through at the bench: shares, totals, and the volumes of two stocks and acid to pipette. */
export function planStandardsText(pair: Pair, plan: StandardsPlan, stock: number, volume: number): string {
  const [lower, higher] = speciesOfPair(pair).map(romanName) as [string, string];
  const gain = (leverage: number): string => Math.sqrt(1 + leverage).toFixed(3);
  return [
    `${lower}/${higher}: ${plan.standards.length} standards to make next, most useful first`,
    '',
    `   #   ${higher.padEnd(6)}  total        ${higher} stock   ${lower} stock   acid      u(S) factor after`,
    ...plan.standards.map(({ share, total, leverageAfter }, i) => {
      const part = (total / stock) * volume;
      const cells = [part * share, part * (1 - share), volume - part].map((mL) => `${mL.toFixed(2)} mL`.padEnd(11));
      return `  ${String(i + 1).padStart(2)}   ${`${(100 * share).toFixed(0)} %`.padEnd(6)}  ${total.toFixed(2)} mol/L  ${cells.join(' ')} ${gain(leverageAfter)}`;
    }),
    '',
    `Both stocks ${stock} mol/L, made up to ${volume} mL with the same acid; states two apart must not meet.`,
    `u(S) factor: how much wider a prediction is than its own spectrum allows. Now ${gain(plan.leverageBefore)}, after these ${gain(plan.leverageAfter)},`,
    `with as many on an even grid ${gain(plan.leverageOfEvenGrid)}. Errors that preparations share fall only with new preparations.`,
    'Strong acid: goggles, gloves, acid into water; V(II) and V(III) under inert gas; follow the safety data sheets.',
    '',
  ].join('\n');
}
