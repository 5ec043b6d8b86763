import type {
  Agreement,
  EndPoint,
  TitrantStrength,
  TitrationDocument,
  TitrationResult,
  TitrationRunResult,
} from '../bench/titration/titrationResult.ts';
import { speciesOfPair, type Species } from '../electrolyte/species.ts';
import { findingText, romanName } from './assayText.ts';
import { concentrationText, percentText, quantityText, wrapped } from './quantityText.ts';
import { standardsRowsCsv } from './standardsRowsText.ts';

const WIDTH = 80;
const LABEL = 24;

const row = (label: string, text: string): string =>
  `  ${label.padEnd(LABEL)}${wrapped(text, WIDTH - LABEL - 2, ' '.repeat(LABEL + 2))}`;

/** Titrations for a terminal: verdict and numbers of each sample, then end points, titrants, rows for the standards sheet. */
export function titrationText(document: TitrationDocument): string {
  const rows = document.titrations.flatMap(({ standardsRow }) => (standardsRow ? [standardsRow] : []));
  return [
    ...document.titrations.map((titration) =>
      sampleText(
        titration,
        document.runs.filter(({ run }) => titration.runs.includes(run)),
      ),
    ),
    ...document.titrants.map(strengthText),
    ...document.runs.filter(({ task }) => task !== 'sample').flatMap(runText),
    ...(rows.length > 0 ? ['for the standards sheet (name the spectrum in `file`):', standardsRowsCsv(rows)] : []),
    '± is the standard uncertainty (k = 1); intervals hold 95 % of the time.',
    '',
  ].join('\n');
}

function sampleText(titration: TitrationResult, runs: readonly TitrationRunResult[]): string {
  const { pair, stateOfCharge, averageOxidationState, totalVanadium } = titration;
  const title = [titration.system, titration.sample].filter(Boolean).join(' / ');
  const species = pair === null ? [] : speciesOfPair(pair);
  const what = pair === null ? 'total vanadium' : species.map(romanName).join('/');
  const concentration = (one: Species): string[] => {
    const quantity = titration.concentration[one];
    return quantity ? [row(romanName(one), `${concentrationText(quantity.value, quantity.uncertainty)} mol/L`)] : [];
  };
  const interval = stateOfCharge.interval
    ? `   95 %: ${(100 * stateOfCharge.interval[0]).toFixed(2)} to ${(100 * stateOfCharge.interval[1]).toFixed(2)} %`
    : '';
  const known = (quantity: { value: number | null }): boolean =>
    quantity.value !== null || titration.unreported !== undefined;
  return [
    `${title} — ${pair === 'V3/V4' || pair === null ? '' : `${titration.side}, `}${what} by titration — ${titration.state.toUpperCase()}`,
    ...titration.findings.filter(({ severity }) => severity !== 'note').map(findingText),
    ...(known(stateOfCharge) && titration.side !== 'composite'
      ? [row('state of charge', `${percentText(stateOfCharge.value, stateOfCharge.uncertainty)} %${interval}`)]
      : []),
    ...(known(averageOxidationState)
      ? [row('mean oxidation state', quantityText(averageOxidationState.value, averageOxidationState.uncertainty))]
      : []),
    ...species.flatMap(concentration),
    ...(known(totalVanadium)
      ? [row('total vanadium', `${quantityText(totalVanadium.value, totalVanadium.uncertainty)} mol/L`)]
      : []),
    ...titration.agreement.map(agreementText),
    ...runs.flatMap(({ run, endPoints }) =>
      endPoints.flatMap((endPoint, j) =>
        endPointText(runs.length > 1 ? `${run}, end point ${j + 1}` : `end point ${j + 1}`, endPoint),
      ),
    ),
    ...budgetText(titration),
    ...(titration.assumed.length > 0 ? [row('assumed', titration.assumed.join('; '))] : []),
    ...titration.findings.filter(({ severity }) => severity === 'note').map(findingText),
    '',
  ].join('\n');
}

function endPointText(label: string, { step, volume, uncertainty, methods }: EndPoint): string[] {
  const list = methods.map(({ method, volume: v, uncertainty: u }) => `${method} ${v.toFixed(3)} ± ${u.toFixed(3)}`);
  return [row(label, `${volume.toFixed(3)} ± ${uncertainty.toFixed(3)} mL, ${step}`), row('', list.join('; '))];
}

const QUANTITY = { stateOfCharge: 'S', averageOxidationState: 'ν', totalVanadium: 'total' } as const;

function agreementText({ quantity, assay, En, agrees }: Agreement): string {
  const shown =
    quantity === 'stateOfCharge'
      ? `${percentText(assay.value, assay.uncertainty)} %`
      : quantityText(assay.value, assay.uncertainty);
  return row(
    `assay, ${QUANTITY[quantity]}`,
    `${shown}: E_n ${En.toFixed(2)}, ${agrees ? 'they agree' : 'they do NOT agree'} (limit 1, expanded uncertainties)`,
  );
}

function budgetText({ budget, totalVanadium, state }: TitrationResult): string[] {
  if (state === 'withheld') return [];
  const bySize = [...budget].sort((a, b) => b.totalVanadium - a.totalVanadium).slice(0, 4);
  const total = totalVanadium.value;
  return [
    row(
      'where U comes from',
      bySize
        .map(
          ({ source, averageOxidationState, totalVanadium: c }) =>
            `${source} ${averageOxidationState > 0 ? `${(100 * averageOxidationState).toFixed(2)} points, ` : ''}${total ? `${((100 * c) / total).toFixed(2)} % of total` : ''}`,
        )
        .join('; '),
    ),
  ];
}

function strengthText({ titrant, strength, origin, runs, budget, findings }: TitrantStrength): string {
  return [
    `${titrant}: ${quantityText(strength.value, strength.uncertainty)} mol of electrons per litre, ${origin}${origin === 'standardised' ? ` in ${runs.join(', ')}` : ''}`,
    ...(origin === 'standardised'
      ? [
          row(
            'where U comes from',
            budget
              .slice(0, 4)
              .map(({ source, uncertainty }) => `${source} ${((100 * uncertainty) / strength.value!).toFixed(3)} %`)
              .join('; '),
          ),
        ]
      : []),
    ...findings.map(findingText),
    '',
  ].join('\n');
}

function runText({ run, course, endPoints, findings, assumed, state }: TitrationRunResult): string[] {
  return [
    [
      `${run} — ${course} — ${state.toUpperCase()}`,
      ...findings.map(findingText),
      ...endPoints.flatMap((endPoint, j) => endPointText(`end point ${j + 1}`, endPoint)),
      ...(assumed.length > 0 ? [row('assumed', assumed.join('; '))] : []),
      '',
    ].join('\n'),
  ];
}
