import type { BalanceDocument, SystemBalance, UnitQuantity } from '../tanks/balance.ts';
import { AMPERE_HOURS_PER_MOLE } from '../units.ts';
import { findingText } from './assayText.ts';
import { driftText } from './driftText.ts';
import { ladderText } from './ladderText.ts';
import { percentText, quantityText, wrapped } from './quantityText.ts';
import { standingText } from './standingText.ts';

const WIDTH = 80;
const LABEL = 24;

/**
 * All plants for a terminal: the verdict in words, the numbers asked for, what to do, what is doubtful, what was assumed.
 * @param columns of the terminal; only the ladder follows it, words are wrapped at 80
 */
export function balanceText(document: BalanceDocument, columns = WIDTH): string {
  return [
    ...document.systems.map((system) => oneSystem(system, columns)),
    '± is the standard uncertainty (k = 1). Limits: common practice, no source.',
    `calibration ${document.calibration.name} ${document.calibration.sha256.slice(0, 12)}`,
    ...(document.systems[0] ? [wrapped(document.systems[0].disclaimer, WIDTH, '')] : []),
    '',
  ].join('\n');
}

const row = (label: string, text: string): string => `  ${label.padEnd(LABEL)}${text}`;
const amount = (quantity: UnitQuantity): string =>
  `${quantityText(quantity.value, quantity.uncertainty)} ${quantity.unit}`;

function oneSystem(system: SystemBalance, columns: number): string {
  const { negative, positive } = system.stateOfCharge;
  return [
    `${system.system || 'plant'} — ${system.verdict.toUpperCase()}`,
    `  ${wrapped(system.sentence, WIDTH - 2, '  ')}`,
    ...(system.netOxidation.value === null ? [] : numberLines(system)),
    row('negative', `${percentText(negative.value, negative.uncertainty)} % charged`),
    row('positive', `${percentText(positive.value, positive.uncertainty)} % charged`),
    ...ladderLines(system, columns),
    ...driftLines(system),
    ...(system.openCircuit
      ? [
          row(
            'rest voltage',
            `${amountOrReading(system.openCircuit.measured)}; spectra predict ${amount(system.openCircuit.predicted)}`,
          ),
        ]
      : []),
    row('do first', system.firstRemedy),
    ...system.remedies
      .slice(0, 3)
      .flatMap((remedy) => [
        `  • ${wrapped(`${remedy.summary}${remedy.gain > 0.5 ? `: ${gainText(remedy.gain, remedy.recovered)}` : ''}`, WIDTH - 4, '    ')}`,
        ...remedy.forbidden.map((text) => `    ${wrapped(`not now: ${text}`, WIDTH - 4, '    ')}`),
      ]),
    ...cautionLines(system),
    ...allFindings(system).map(findingText),
    ...(system.assumed.length > 0
      ? [row('assumed', wrapped(system.assumed.join('; '), WIDTH - LABEL - 2, ' '.repeat(LABEL + 2)))]
      : []),
    '',
  ].join('\n');
}

/** Both sides on one axis: `P` under `n` would be equally charged. */
function ladderLines({ negative, positive }: SystemBalance, columns: number): string[] {
  if (
    (negative?.averageOxidationState.value ?? null) === null ||
    (positive?.averageOxidationState.value ?? null) === null
  )
    return [];
  const ladder = ladderText(
    { negative: negative!.averageOxidationState, positive: positive!.averageOxidationState },
    Math.min(columns, WIDTH) - 2,
  );
  return ladder.split('\n').map((line) => `  ${line}`);
}

function driftLines({ drift }: SystemBalance): string[] {
  if (!drift) return [];
  return [row('drift of X', driftText(drift.netOxidation)), row('drift of M', driftText(drift.vanadiumShift))];
}

const gainText = (gain: number, recovered: number): string =>
  `${Math.round(gain).toLocaleString('en')} Ah back, ${Math.round(100 * recovered)} % of what can be recovered`;

const amountOrReading = (quantity: UnitQuantity): string =>
  quantity.uncertainty === null ? `${quantity.value?.toFixed(3)} ${quantity.unit}` : amount(quantity);

function numberLines(system: SystemBalance): string[] {
  const judged = system.judged!;
  const standing = (of: 'netOxidation' | 'vanadiumShift' | 'chargeOffset'): string => standingText(judged[of]);
  const ampereHours = (quantity: UnitQuantity): string =>
    Math.round(quantity.value! * AMPERE_HOURS_PER_MOLE).toLocaleString('en');
  return [
    row('net oxidation X', `${amount(system.netOxidation).padEnd(22)} ${standing('netOxidation')}`),
    row('vanadium shift M', `${amount(system.vanadiumShift).padEnd(22)} ${standing('vanadiumShift')}`),
    row('charge offset', `${amount(system.chargeOffset).padEnd(22)} ${standing('chargeOffset')}`),
    row(
      'usable charge',
      `${amount(system.usableCharge)} = ${ampereHours(system.usableCharge)} Ah of ${ampereHours(system.fullCharge)} Ah`,
    ),
    row(
      'mean oxidation state',
      quantityText(system.averageOxidationState.value, system.averageOxidationState.uncertainty),
    ),
  ];
}

function cautionLines(system: SystemBalance): string[] {
  const seen = new Map(
    system.remedies.flatMap((remedy) => remedy.cautions.map(({ code, text }) => [code as string, text] as const)),
  );
  return [...seen.values()].map((text) => `  ! ${wrapped(text, WIDTH - 4, '    ')}`);
}

function allFindings(system: SystemBalance) {
  const tagged = (['negative', 'positive', 'composite'] as const).flatMap((side) =>
    (system[side]?.findings ?? []).map((finding) => ({ ...finding, message: `${side}: ${finding.message}` })),
  );
  const order = { withhold: 0, caution: 1, note: 2 } as const;
  const once = new Map(
    [...system.findings, ...tagged].map((finding) => [
      finding.code === 'reference-calibration' ? finding.code : finding.message,
      finding,
    ]),
  );
  return [...once.values()]
    .filter((finding) => finding.severity !== 'note')
    .sort((a, b) => order[a.severity] - order[b.severity]);
}
