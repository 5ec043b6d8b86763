import type { TankDetails } from '../tanks/fromAssays.ts';
import { readSheet, type RowReader } from './sheet.ts';
import { readRows, SAMPLES_COLUMNS, samplesRow, type SamplesRow, type SheetOf } from './samplesSheet.ts';

export const TANKS_COLUMNS = [
  ...SAMPLES_COLUMNS,
  'tank',
  'volume_L',
  'volume_u_L',
  'cells_in_series',
  'target_oxidation_state',
  'open_circuit_V',
  'formal_potential_V',
  'fill_vanadium_mol',
  'fill_volume_L',
  'fill_vanadium_mol_L',
  'composite_share_negative',
  'composite_share_positive',
  'charge_counter_Ah',
  'free_volume_L',
  'watch_oxidation',
  'act_oxidation',
] as const;

/** A cuvette and the tank it came from. Null: nobody said. Volumes in L, amounts in mol of this side, potentials in V. */
export interface TanksRow extends SamplesRow, Omit<TankDetails, 'takenAt'> {
  readonly chargeCounter: number | null;
  readonly freeVolume: number | null;
}

/** A cell that says nothing without the one beside it. */
function needsBoth(read: RowReader, one: string, other: string): void {
  for (const [given, empty] of [
    [one, other],
    [other, one],
  ] as const)
    if (read.text(given) !== null && read.text(empty) === null)
      read.refuse(
        'cell-alone',
        empty,
        `expected ${empty} beside ${given}; received an empty cell`,
        `fill in both, or leave both empty`,
      );
}

export function readTanksSheet(bytes: Uint8Array, fileName: string): SheetOf<TanksRow> {
  const sheet = readSheet(bytes, fileName, TANKS_COLUMNS, ['sample', 'side', 'file', 'volume_L']);
  const names = new Set<string>();
  return readRows(sheet, (read, row): TanksRow | null => {
    const sample = samplesRow(read, row, fileName, names);
    const positive = (column: string, unit: string): number | null =>
      read.number(column, (value) => value > 0, `more than 0 ${unit}`);
    const volume = positive('volume_L', 'L');
    if (sample && sample.side !== 'composite' && volume === null && read.text('volume_L') === null)
      read.refuse(
        'volume-unknown',
        'volume_L',
        'expected the volume of the tank; received an empty cell',
        'read the level and write the litres',
      );
    needsBoth(read, 'fill_volume_L', 'fill_vanadium_mol_L');
    needsBoth(read, 'composite_share_negative', 'composite_share_positive');
    const fillVolume = positive('fill_volume_L', 'L');
    const fillConcentration = positive('fill_vanadium_mol_L', 'mol/L');
    const negativeShare = positive('composite_share_negative', 'mL');
    const positiveShare = positive('composite_share_positive', 'mL');
    const cells = read.number(
      'cells_in_series',
      (value) => value >= 1 && Number.isInteger(value),
      'a whole number of cells, 1 or more',
    );
    const rest = {
      tank: read.text('tank'),
      volume,
      volumeUncertainty: read.number('volume_u_L', (value) => value >= 0, '0 L or more'),
      cellsInSeries: cells,
      targetOxidationState: read.number(
        'target_oxidation_state',
        (value) => value > 2 && value < 5,
        'a mean oxidation state between 2 and 5',
      ),
      openCircuit: positive('open_circuit_V', 'V'),
      formalPotential: positive('formal_potential_V', 'V'),
      fillVanadium:
        positive('fill_vanadium_mol', 'mol') ??
        (fillVolume !== null && fillConcentration !== null ? fillVolume * fillConcentration : null),
      compositeShares:
        negativeShare !== null && positiveShare !== null ? { negative: negativeShare, positive: positiveShare } : null,
      chargeCounter: read.number('charge_counter_Ah'),
      freeVolume: read.number('free_volume_L', (value) => value >= 0, '0 L or more'),
      watchOxidation: positive('watch_oxidation', ''),
      actOxidation: positive('act_oxidation', ''),
    };
    return sample ? { ...sample, ...rest } : null;
  });
}
