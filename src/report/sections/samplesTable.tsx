import type { AssayResult } from '../../assay/result.ts';
import { percentText, quantityText } from '../quantityText.ts';
import { STATE_WORD } from '../words.ts';

/** All samples of a document, one row each. */
export function SamplesTable({ assays }: { assays: readonly AssayResult[] }) {
  return (
    <div class="scroll" tabIndex={0} role="group" aria-label="all samples">
      <table>
        <thead>
          <tr>
            <th scope="col">sample</th>
            <th scope="col">side</th>
            <th scope="col" class="number">
              state of charge, %
            </th>
            <th scope="col" class="number">
              mean oxidation state
            </th>
            <th scope="col" class="number">
              total, mol/L
            </th>
            <th scope="col">state</th>
            <th scope="col">why</th>
          </tr>
        </thead>
        <tbody>
          {assays.map((assay, i) => (
            <tr key={i}>
              <th scope="row" class="break">
                {[assay.system, assay.sample].filter(Boolean).join(' / ')}
              </th>
              <td>{assay.side}</td>
              <td class="number">
                {assay.side === 'composite'
                  ? '–'
                  : percentText(assay.stateOfCharge.value, assay.stateOfCharge.uncertainty)}
              </td>
              <td class="number">
                {quantityText(assay.averageOxidationState.value, assay.averageOxidationState.uncertainty)}
              </td>
              <td class="number">{quantityText(assay.totalVanadium.value, assay.totalVanadium.uncertainty)}</td>
              <td>{STATE_WORD[assay.state]}</td>
              <td>
                {assay.findings
                  .filter(({ severity }) => severity !== 'note')
                  .map(({ code }) => code)
                  .join(', ') || '–'}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
