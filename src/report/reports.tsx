import type { VNode } from 'preact';
import { renderToString } from 'preact-render-to-string';
import type { AssayDocument, AssayResult } from '../assay/result.ts';
import type { Calibration } from '../calibration/calibration.ts';
import { serialiseCalibration } from '../calibration/file.ts';
import type { BalanceDocument } from '../tanks/balance.ts';
import { DepthPicture } from './pictures/depthPicture.tsx';
import { OxidationLadder } from './pictures/oxidationLadder.tsx';
import { SamplesPicture } from './pictures/samplesPicture.tsx';
import { MOST_WITH_CURVES, recordBlock, recordJson } from './recordBlock.ts';
import { AssaySection } from './sections/assaySection.tsx';
import { assaysOf, BalanceSection } from './sections/balanceSection.tsx';
import { CalibrationSection } from './sections/calibrationSection.tsx';
import { Hash, Provenance, RecordNote } from './sections/provenance.tsx';
import { SamplesTable } from './sections/samplesTable.tsx';
import { STYLE_SHEET } from './styleSheet.ts';
import { idFrom, STATE_WORD } from './words.ts';

/** Assays whose spectra are drawn in a report of many. */
const MOST_DETAILED = 8;

/**
 * One HTML file of a set of assays: opens offline, prints, needs no script, carries its record.
 * @param madeBy tool and version, for the record
 */
export function assayReport(document: AssayDocument, madeBy: string): Promise<string> {
  const { assays, calibration } = document;
  const detailed = assays.length <= MOST_DETAILED ? assays : worstFirst(assays).slice(0, MOST_DETAILED);
  const systems = bothSides(assays);
  return page(
    assays.length === 1 ? `Assay of ${assays[0]!.sample}` : `Assay of ${assays.length} samples`,
    <>
      <p>{countSentence(assays)}</p>
      {assays.length > 1 && <SamplesTable assays={assays} />}
      {assays.length > MOST_DETAILED && <SamplesPicture id="samples" assays={assays} />}
      {systems.map(({ negative, positive }, i) => (
        <section key={i}>
          <h2 class="break">{negative.system || 'Both sides'}</h2>
          <OxidationLadder
            id={idFrom('ladder', i)}
            ladder={{ negative: negative.averageOxidationState, positive: positive.averageOxidationState }}
          />
          <DepthPicture id={idFrom('depth', i)} assays={[negative, positive]} />
        </section>
      ))}
      {detailed.length < assays.length && (
        <p class="soft">
          Spectra are drawn for {detailed.length} of {assays.length} samples, the doubtful ones first.
        </p>
      )}
      {detailed.map((assay, i) => (
        <AssaySection key={i} id={idFrom('assay', i)} assay={assay} />
      ))}
      <Provenance calibration={calibration} assays={assays} madeBy={madeBy} />
    </>,
    recordJson(document, assays.length <= MOST_WITH_CURVES),
  );
}

/** One HTML file of one or several plants: verdict, numbers, remedies, and the assays they rest on. */
export function balanceReport(document: BalanceDocument, madeBy: string): Promise<string> {
  const assays = document.systems.flatMap(assaysOf);
  const detailed = assays.length <= MOST_DETAILED ? assays : worstFirst(assays).slice(0, MOST_DETAILED);
  return page(
    document.systems.length === 1
      ? `Balance of ${document.systems[0]!.system || 'the plant'}`
      : `Balance of ${document.systems.length} plants`,
    <>
      {document.systems.map((system, i) => (
        <BalanceSection key={i} id={idFrom('plant', i)} balance={system} />
      ))}
      {assays.length > MOST_DETAILED && <SamplesTable assays={assays} />}
      {detailed.map((assay, i) => (
        <AssaySection key={i} id={idFrom('assay', i)} assay={assay} />
      ))}
      <Provenance calibration={document.calibration} assays={assays} madeBy={madeBy} />
    </>,
    recordJson(document, assays.length <= MOST_WITH_CURVES),
  );
}

/** One HTML file that defends a calibration; the calibration file itself is its record. @param sha256 of the calibration's file */
export function calibrationReport(calibration: Calibration, sha256: string, madeBy: string): Promise<string> {
  const files = new Map(calibration.standards.map(({ file, sha256 }) => [file, sha256]));
  return page(
    `Calibration ${calibration.name}`,
    <>
      <CalibrationSection id="calibration" calibration={calibration} />
      <section aria-labelledby="provenance">
        <h2 id="provenance">Where these numbers come from</h2>
        <p class="break">
          {calibration.provenance.tool}: <code>{calibration.provenance.command}</code>
        </p>
        <div class="scroll" tabIndex={0} role="group" aria-label="inputs">
          <table>
            <tbody>
              <tr>
                <th scope="row">this calibration’s file</th>
                <td>
                  <Hash sha256={sha256} />
                </td>
              </tr>
              <tr>
                <th scope="row">sheet of standards</th>
                <td>
                  <Hash sha256={calibration.provenance.sheetSha256} />
                </td>
              </tr>
              {[...files].map(([file, hash]) => (
                <tr key={file}>
                  <th scope="row" class="break">
                    {file}
                  </th>
                  <td>
                    <Hash sha256={hash} />
                  </td>
                </tr>
              ))}
            </tbody>
          </table>
        </div>
        <RecordNote madeBy={madeBy} />
      </section>
    </>,
    serialiseCalibration(calibration),
  );
}

async function page(title: string, body: VNode, record: string): Promise<string> {
  const block = await recordBlock(record);
  const content = renderToString(
    <main class="sheet">
      <h1 class="break">{title}</h1>
      {body}
    </main>,
  );
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width,initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'">
${renderToString(<title>{title}</title>)}
<style>${STYLE_SHEET}</style>
</head>
<body>
${content}
${block}
</body>
</html>
`;
}

const RANK = { withheld: 0, caution: 1, sound: 2 } as const;
const worstFirst = (assays: readonly AssayResult[]): AssayResult[] =>
  [...assays].sort((a, b) => RANK[a.state] - RANK[b.state]);

function countSentence(assays: readonly AssayResult[]): string {
  const parts = (['sound', 'caution', 'withheld'] as const).flatMap((state) => {
    const count = assays.filter((assay) => assay.state === state).length;
    return count === 0 ? [] : [`${count} ${STATE_WORD[state]}`];
  });
  return `${assays.length} ${assays.length === 1 ? 'sample' : 'samples'}: ${parts.join(', ')}.`;
}

/** Systems with exactly one negative and one positive sample: those two can be compared. */
function bothSides(assays: readonly AssayResult[]): { negative: AssayResult; positive: AssayResult }[] {
  const systems = [...new Set(assays.map(({ system }) => system))];
  return systems.flatMap((system) => {
    const of = (side: AssayResult['side']) => assays.filter((assay) => assay.system === system && assay.side === side);
    const [negative, ...moreNegative] = of('negative');
    const [positive, ...morePositive] = of('positive');
    return negative && positive && moreNegative.length + morePositive.length === 0 ? [{ negative, positive }] : [];
  });
}
