import type { AssayResult } from '../../assay/result.ts';
import type { SystemBalance, UnitQuantity } from '../../tanks/balance.ts';
import type { Remedy } from '../../tanks/remedies.ts';
import type { Judged } from '../../tanks/verdict.ts';
import { AMPERE_HOURS_PER_MOLE } from '../../units.ts';
import { DepthPicture } from '../pictures/depthPicture.tsx';
import { OxidationLadder, type Ladder } from '../pictures/oxidationLadder.tsx';
import { RemediesPicture } from '../pictures/remediesPicture.tsx';
import { driftText } from '../driftText.ts';
import { decimalsFor, percentText, quantityText } from '../quantityText.ts';
import { standingText } from '../standingText.ts';
import { Answer, Answers } from './answers.tsx';
import { Findings } from './findings.tsx';

export const VERDICT_WORD: Readonly<Record<SystemBalance['verdict'], string>> = {
  'in-balance': 'in balance',
  watch: 'watch',
  shifted: 'vanadium has shifted',
  oxidised: 'oxidised',
  'over-reduced': 'over-reduced',
  'shifted-and-oxidised': 'shifted and oxidised',
  hidden: 'two faults hide each other',
  exchanged: 'labels exchanged',
  undecided: 'undecided',
};

/** How the verdict is tinted; the words say it too. */
export const VERDICT_TINT: Readonly<Record<SystemBalance['verdict'], 'sound' | 'caution' | 'withheld'>> = {
  'in-balance': 'sound',
  watch: 'caution',
  shifted: 'caution',
  oxidised: 'caution',
  'over-reduced': 'caution',
  'shifted-and-oxidised': 'caution',
  hidden: 'caution',
  exchanged: 'withheld',
  undecided: 'withheld',
};

export const assaysOf = (balance: SystemBalance): AssayResult[] =>
  [balance.negative, balance.positive, balance.composite].filter((assay) => assay !== null);

/** One plant: the verdict, the numbers asked for, what to do; assays follow apart. */
export function BalanceSection({ id, balance }: { id: string; balance: SystemBalance }) {
  return (
    <section id={id} aria-labelledby={`${id}-title`}>
      <h2 id={`${id}-title`} class="break">
        {balance.system || 'The plant'}:{' '}
        <span class={`badge ${VERDICT_TINT[balance.verdict]}`}>{VERDICT_WORD[balance.verdict]}</span>
      </h2>
      <p>
        <strong>{balance.sentence}</strong>
      </p>
      <p>
        Do first: <strong>{balance.firstRemedy}</strong>.
      </p>
      <BalanceAnswers balance={balance} />
      <Findings findings={balance.findings} />
      <OxidationLadder id={`${id}-ladder`} ladder={ladderOf(balance)} />
      <DepthPicture id={`${id}-depth`} assays={assaysOf(balance)} />
      <BalanceTable balance={balance} />
      <Remedies id={id} balance={balance} />
    </section>
  );
}

export function ladderOf(balance: SystemBalance): Ladder {
  const nothing = { value: null, uncertainty: null };
  return {
    negative: balance.negative?.averageOxidationState ?? nothing,
    positive: balance.positive?.averageOxidationState ?? nothing,
    ...(balance.averageOxidationState.value === null ? {} : { both: balance.averageOxidationState }),
  };
}

function BalanceAnswers({ balance }: { balance: SystemBalance }) {
  const { negative, positive } = balance.stateOfCharge;
  const ampereHours = (quantity: UnitQuantity): string =>
    quantity.value === null ? 'withheld' : Math.round(quantity.value * AMPERE_HOURS_PER_MOLE).toLocaleString('en');
  return (
    <Answers>
      <Answer name="negative side charged" value={percentText(negative.value, negative.uncertainty)} unit="%" />
      <Answer name="positive side charged" value={percentText(positive.value, positive.uncertainty)} unit="%" />
      <Answer
        name="usable charge"
        value={ampereHours(balance.usableCharge)}
        unit={`Ah of ${ampereHours(balance.fullCharge)}`}
      />
    </Answers>
  );
}

const expandedText = ({ uncertainty }: UnitQuantity): string =>
  uncertainty === null ? '–' : (2 * uncertainty).toFixed(decimalsFor(uncertainty));

const percent = (share: number): string => `${Number((100 * share).toPrecision(4))} %`;

const QUANTITIES = [
  ['netOxidation', 'net oxidation X', 'electrons the plant has lost; no pumping changes it'],
  ['vanadiumShift', 'vanadium shift M', 'vanadium that sits on the positive side; no electrons change it'],
  ['chargeOffset', 'charge offset δ', 'charge of the positive side beyond that of the negative; X − M'],
] as const;

function BalanceTable({ balance }: { balance: SystemBalance }) {
  if (balance.netOxidation.value === null) return null;
  const { oxidation, shift } = balance.limits;
  return (
    <>
      <h3>How far out of balance, against which limit</h3>
      <div class="scroll" tabIndex={0} role="group" aria-label="imbalance">
        <table>
          <thead>
            <tr>
              <th scope="col">quantity</th>
              <th scope="col" class="number">
                value ± u, mol
              </th>
              <th scope="col" class="number">
                95 %: ± U
              </th>
              <th scope="col">judged</th>
              <th scope="col">what it is</th>
            </tr>
          </thead>
          <tbody>
            {QUANTITIES.map(([key, name, meaning]) => (
              <tr key={key}>
                <th scope="row">{name}</th>
                <td class="number">{quantityText(balance[key].value, balance[key].uncertainty)}</td>
                <td class="number">{expandedText(balance[key])}</td>
                <td>{balance.judged && standingText(balance.judged[key] as Judged)}</td>
                <td>{meaning}</td>
              </tr>
            ))}
            <tr>
              <th scope="row">mean oxidation state</th>
              <td class="number">
                {quantityText(balance.averageOxidationState.value, balance.averageOxidationState.uncertainty)} (1)
              </td>
              <td class="number">{expandedText(balance.averageOxidationState)}</td>
              <td>3.5 when nothing is lost</td>
              <td>of both tanks together</td>
            </tr>
            {balance.openCircuit && (
              <tr>
                <th scope="row">rest voltage</th>
                <td class="number">{balance.openCircuit.measured.value?.toFixed(3)} V</td>
                <td class="number">–</td>
                <td>
                  spectra predict{' '}
                  {quantityText(balance.openCircuit.predicted.value, balance.openCircuit.predicted.uncertainty)} V
                </td>
                <td>an independent check of both sides together</td>
              </tr>
            )}
          </tbody>
        </table>
      </div>
      <p class="soft">
        Limits ({balance.limits.source}): oxidation {oxidation.watch} watch and {oxidation.act} act, as a change of the
        mean oxidation state; shift and offset {percent(shift.watch)} and {percent(shift.act)} of what the plant can
        hold.
        {balance.assumed.length > 0 && ` Assumed: ${balance.assumed.join('; ')}.`}
      </p>
      {balance.drift && (
        <p>
          Over {balance.drift.visits} visits: net oxidation moves by {driftText(balance.drift.netOxidation)}. Vanadium
          shift moves by {driftText(balance.drift.vanadiumShift)}.
        </p>
      )}
    </>
  );
}

function Remedies({ id, balance }: { id: string; balance: SystemBalance }) {
  if (balance.remedies.length === 0) return null;
  const cautions = new Map(
    balance.remedies.flatMap((remedy) => remedy.cautions.map(({ code, text }) => [code as string, text] as const)),
  );
  return (
    <>
      <RemediesPicture id={`${id}-remedies`} balance={balance} />
      <h3>What puts it right</h3>
      <ol class="remedies">
        {balance.remedies.map((remedy, i) => (
          <li key={i}>
            <RemedyItem remedy={remedy} />
          </li>
        ))}
      </ol>
      {cautions.size > 0 && (
        <ul class="findings">
          <li class="caution">
            <strong>Take care:</strong>
            <ul class="do">
              {[...cautions].map(([code, text]) => (
                <li key={code}>{text}.</li>
              ))}
            </ul>
          </li>
        </ul>
      )}
      <p>
        <em>{balance.disclaimer}</em>
      </p>
    </>
  );
}

function RemedyItem({ remedy }: { remedy: Remedy }) {
  const equivalents = remedy.amounts.filter(({ what }) => what !== 'negative' && what !== 'positive');
  return (
    <>
      <strong>{remedy.summary}</strong>
      {remedy.gain > 0.5 &&
        `: ${Math.round(remedy.gain).toLocaleString('en')} Ah back, ${Math.round(100 * remedy.recovered)} % of what can be recovered`}
      . {remedy.how}
      {remedy.needs && ` Needs: ${remedy.needs}.`}
      {remedy.quantity &&
        ` Amount ${quantityText(remedy.quantity.value, remedy.quantity.uncertainty)} ${remedy.quantity.unit} (± u).`}
      {equivalents.length > 0 &&
        ` That is ${equivalents.map(({ what, value, unit }) => `${what} ${Number(value.toPrecision(3))} ${unit}`.trim()).join(', ')}.`}
      {remedy.warming > 0.05 && ` Warms by ${remedy.warming.toFixed(1)} K.`}
      {remedy.rounds.length > 0 &&
        ` Net oxidation left after each round: ${remedy.rounds.map(({ left }) => left.toFixed(1)).join(', ')} mol.`}
      {remedy.forbidden.length > 0 && (
        <ul class="findings">
          {remedy.forbidden.map((text) => (
            <li class="withhold" key={text}>
              <strong>Not now:</strong> {text}
            </li>
          ))}
        </ul>
      )}
    </>
  );
}
