import type { BalanceDocument } from '../tanks/balance.ts';
import { csvLine } from './csv.ts';

const COLUMNS = [
  'system',
  'verdict',
  'first_remedy',
  'net_oxidation_mol',
  'u_net_oxidation_mol',
  'vanadium_shift_mol',
  'u_vanadium_shift_mol',
  'charge_offset_mol',
  'u_charge_offset_mol',
  'usable_charge_mol',
  'u_usable_charge_mol',
  'mean_oxidation_state',
  'u_mean_oxidation_state',
  'state_of_charge_negative',
  'u_state_of_charge_negative',
  'state_of_charge_positive',
  'u_state_of_charge_positive',
  'findings',
];

/** One line a plant. */
export const balanceCsv = (document: BalanceDocument): string =>
  [
    csvLine(COLUMNS),
    ...document.systems.map((system) =>
      csvLine([
        system.system,
        system.verdict,
        system.firstRemedy,
        ...[
          system.netOxidation,
          system.vanadiumShift,
          system.chargeOffset,
          system.usableCharge,
          system.averageOxidationState,
          system.stateOfCharge.negative,
          system.stateOfCharge.positive,
        ].flatMap((quantity) => [quantity.value, quantity.uncertainty]),
        system.findings.map((finding) => finding.code).join(' '),
      ]),
    ),
    '',
  ].join('\n');
