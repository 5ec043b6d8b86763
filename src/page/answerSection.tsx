import { balanceReport, assayReport, VERSION, type AssayDocument, type BalanceDocument } from '../index.ts';
import { DepthPicture } from '../report/pictures/depthPicture.tsx';
import { OxidationLadder } from '../report/pictures/oxidationLadder.tsx';
import { AssaySection } from '../report/sections/assaySection.tsx';
import { BalanceSection, VERDICT_TINT, VERDICT_WORD } from '../report/sections/balanceSection.tsx';
import { idFrom, percentWithUnit } from '../report/words.ts';
import { AMPERE_HOURS_PER_MOLE } from '../units.ts';
import type { Bench } from './bench.ts';
import { saveFile } from './saveFile.ts';

const MADE_BY = `tankhue ${VERSION}, the page`;

/** The verdict in one line that stays in sight while the sheet is changed. */
export function AnswerStrip({ bench }: { bench: Bench }) {
  const { results } = bench.state;
  if (!results?.assays) return null;
  return (
    <div class="strip" role="status">
      {results.balance ? (
        results.balance.systems.map((system, i) => (
          <p key={i}>
            {system.system && <strong class="break">{system.system}: </strong>}
            <span class={`badge ${VERDICT_TINT[system.verdict]}`}>{VERDICT_WORD[system.verdict]}</span>{' '}
            <span class="numbers">
              negative {percentWithUnit(system.stateOfCharge.negative)}, positive{' '}
              {percentWithUnit(system.stateOfCharge.positive)}
              {system.usableCharge.value !== null &&
                `, usable ${Math.round(system.usableCharge.value * AMPERE_HOURS_PER_MOLE).toLocaleString('en')} Ah`}
            </span>{' '}
            do first: <strong>{system.firstRemedy}</strong> <a href={`#now-plant-${i + 1}`}>why</a>
          </p>
        ))
      ) : (
        <p class="numbers">
          {results.assays.assays
            .map(
              (assay) =>
                `${assay.sample}: ${assay.side === 'composite' ? 'composite' : `charged ${percentWithUnit(assay.stateOfCharge)}`}`,
            )
            .join('; ')}
        </p>
      )}
    </div>
  );
}

export function AnswerSection({ bench }: { bench: Bench }) {
  const { results, answeredIn } = bench.state;
  const assays = results?.assays;
  return (
    <section aria-labelledby="answer-title" id="answer">
      <h2 id="answer-title">3 The answer</h2>
      {!assays && <p class="soft">Appears here as soon as one spectrum can be assayed.</p>}
      {assays && (
        <>
          <p>
            <button type="button" onClick={() => void saveReport(results.balance, assays)}>
              Save the report (HTML)
            </button>{' '}
            <button type="button" onClick={() => saveRecord(results.balance ?? assays)}>
              Save the record (JSON)
            </button>
            {answeredIn !== null && (
              <span class="soft"> Computed on this computer in {Math.max(1, Math.round(answeredIn))} ms.</span>
            )}
          </p>
          {!results.balance && (
            <p class="beside caution">
              Write the volume of each tank to see the balance, its cause and the remedies: without volumes only the
              charge of each side can be told.
            </p>
          )}
          <Documents balance={results.balance} assays={assays} id="now" />
        </>
      )}
    </section>
  );
}

interface DocumentsProps {
  readonly id: string;
  readonly balance: BalanceDocument | null;
  readonly assays: AssayDocument;
}

/** Balance where there is one, then every assay. */
function Documents({ id, balance, assays }: DocumentsProps) {
  const [negative, positive] = (['negative', 'positive'] as const).map((side) =>
    assays.assays.find((assay) => assay.side === side),
  );
  return (
    <>
      {balance?.systems.map((system, i) => (
        <BalanceSection key={i} id={idFrom(`${id}-plant`, i)} balance={system} />
      ))}
      {!balance && negative && positive && (
        <>
          <OxidationLadder
            id={`${id}-ladder`}
            ladder={{ negative: negative.averageOxidationState, positive: positive.averageOxidationState }}
          />
          <DepthPicture id={`${id}-depth`} assays={[negative, positive]} />
        </>
      )}
      {assays.assays.map((assay, i) => (
        <AssaySection key={i} id={idFrom(`${id}-assay`, i)} assay={assay} />
      ))}
    </>
  );
}

/** An earlier report or record, as it was. */
export function OpenedSection({ bench }: { bench: Bench }) {
  const { opened } = bench.state;
  if (!opened) return null;
  const { document } = opened;
  return (
    <section aria-labelledby="opened-title">
      <h2 id="opened-title" class="break">
        As read from {opened.name}
      </h2>
      <p>
        <button type="button" onClick={() => bench.closeOpened()}>
          Close
        </button>
      </p>
      {document.schema === 'tankhue/balance/1' ? (
        document.systems.map((system, i) => <BalanceSection key={i} id={idFrom('opened-plant', i)} balance={system} />)
      ) : (
        <Documents id="opened" balance={null} assays={document} />
      )}
    </section>
  );
}

async function saveReport(balance: BalanceDocument | null, assays: AssayDocument): Promise<void> {
  const html = balance ? await balanceReport(balance, MADE_BY) : await assayReport(assays, MADE_BY);
  saveFile(balance ? 'balance.html' : 'assay.html', html, 'text/html');
}

/** The same bytes as the command line prints with --format json. */
const saveRecord = (document: BalanceDocument | AssayDocument): void =>
  saveFile(
    document.schema === 'tankhue/balance/1' ? 'balance.json' : 'assay.json',
    `${JSON.stringify(document, null, 1)}\n`,
    'application/json',
  );
