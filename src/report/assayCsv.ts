import type { AssayDocument } from '../assay/result.ts';
import { SPECIES } from '../electrolyte/species.ts';
import { csvLine } from './csv.ts';

const COLUMNS = [
  'sample',
  'system',
  'side',
  'pair',
  'state',
  'state_of_charge',
  'u_state_of_charge',
  'low_95',
  'high_95',
  'mean_oxidation_state',
  'u_mean_oxidation_state',
  'total_mol_L',
  'u_total_mol_L',
  ...SPECIES.flatMap((species) => [`${species}_mol_L`, `u_${species}_mol_L`]),
  'findings',
  'file',
  'column',
  'sha256',
];

/** One line an assay, header first; withheld numbers stay empty. */
export function assayCsv(document: AssayDocument): string {
  return [
    csvLine(COLUMNS),
    ...document.assays.map((assay) =>
      csvLine([
        assay.sample,
        assay.system,
        assay.side,
        assay.pair,
        assay.state,
        assay.stateOfCharge.value,
        assay.stateOfCharge.uncertainty,
        assay.stateOfCharge.interval?.[0] ?? null,
        assay.stateOfCharge.interval?.[1] ?? null,
        assay.averageOxidationState.value,
        assay.averageOxidationState.uncertainty,
        assay.totalVanadium.value,
        assay.totalVanadium.uncertainty,
        ...SPECIES.flatMap((species) => [
          assay.concentration[species]?.value ?? null,
          assay.concentration[species]?.uncertainty ?? null,
        ]),
        assay.findings.map((finding) => finding.code).join(' '),
        assay.input.file,
        assay.input.column,
        assay.input.sha256,
      ]),
    ),
    '',
  ].join('\n');
}
