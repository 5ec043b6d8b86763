import type { AssayResult } from '../../assay/result.ts';

interface ProvenanceProps {
  readonly calibration: { readonly name: string; readonly sha256: string };
  readonly assays: readonly AssayResult[];
  readonly madeBy: string;
}

/** Where the numbers come from: every input with its hash, and where the record lies in the file. */
export function Provenance({ calibration, assays, madeBy }: ProvenanceProps) {
  const files = new Map<string, { file: string; sha256: string; columns: string[] }>();
  for (const { input } of assays) {
    const key = `${input.file}\n${input.sha256}`;
    const known = files.get(key) ?? { file: input.file, sha256: input.sha256, columns: [] };
    if (!known.columns.includes(input.column)) known.columns.push(input.column);
    files.set(key, known);
  }
  return (
    <section aria-labelledby="provenance">
      <h2 id="provenance">Where these numbers come from</h2>
      <div class="scroll" tabIndex={0} role="group" aria-label="inputs">
        <table>
          <thead>
            <tr>
              <th scope="col">input</th>
              <th scope="col">columns</th>
              <th scope="col">SHA-256</th>
            </tr>
          </thead>
          <tbody>
            <tr>
              <th scope="row">calibration {calibration.name}</th>
              <td>–</td>
              <td>
                <Hash sha256={calibration.sha256} />
              </td>
            </tr>
            {[...files.values()].map(({ file, sha256, columns }) => (
              <tr key={`${file}\n${sha256}`}>
                <th scope="row" class="break">
                  {file || 'pasted'}
                </th>
                <td class="break">
                  {columns.slice(0, 8).join(', ')}
                  {columns.length > 8 && `, … (${columns.length})`}
                </td>
                <td>
                  <Hash sha256={sha256} />
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <RecordNote madeBy={madeBy} />
    </section>
  );
}

export function RecordNote({ madeBy }: { madeBy: string }) {
  return (
    <>
      <p class="soft">
        Made by {madeBy}. The record this report was drawn from lies in this file and can be read back from it. Opens
        and prints without a network and without scripts.
      </p>
      <p class="signature">Checked by ______________________ on ______________</p>
    </>
  );
}

export const Hash = ({ sha256 }: { sha256: string }) =>
  sha256 === '' ? <span class="soft">not known</span> : <code class="break">{sha256}</code>;
