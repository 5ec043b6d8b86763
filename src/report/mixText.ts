import type { ElectrolysisStage, MixDocument, Mixture, Portion } from '../bench/mixing/mixResult.ts';
import { speciesOfPair } from '../electrolyte/species.ts';
import { findingText, romanName } from './assayText.ts';
import { concentrationText, decimalsFor, percentText, quantityText, wrapped } from './quantityText.ts';
import { standardsRowsCsv } from './standardsRowsText.ts';

const WIDTH = 80;
const LABEL = 24;

const row = (label: string, text: string): string =>
  `  ${label.padEnd(LABEL)}${wrapped(text, WIDTH - LABEL - 2, ' '.repeat(LABEL + 2))}`;

/** What to mix, for a terminal: verdict, what to measure out, steps, label, cautions, rows for the standards sheet. */
export function mixText(document: MixDocument): string {
  const rows = document.mixtures.flatMap(({ standardsRow }) => (standardsRow ? [standardsRow] : []));
  const cautions = new Map(document.mixtures.flatMap(({ cautions }) => cautions).map(({ code, text }) => [code, text]));
  return [
    ...document.mixtures.map(mixtureText),
    ...stagesText(document.stages),
    ...[...cautions.values()].map((text) => `  ${wrapped(`take care: ${text}`, WIDTH - 4, '    ')}`),
    `  ${wrapped(document.disclaimer, WIDTH - 4, '  ')}`,
    ...(rows.length > 0 ? ['', 'for the standards sheet (name the spectrum in `file`):', standardsRowsCsv(rows)] : []),
    '± is the standard uncertainty (k = 1).',
    '',
  ].join('\n');
}

function mixtureText(mixture: Mixture): string {
  const [lower, higher] = speciesOfPair(mixture.pair);
  const { stateOfCharge, averageOxidationState, totalVanadium, concentration, sulfate, freeAcid } = mixture;
  const species = [lower, higher].filter(
    (one) => concentration[one]!.value !== 0 || concentration[one]!.uncertainty !== 0,
  );
  const label = mixture.state === 'withheld' ? 'nearest' : 'label';
  return [
    `${mixture.name} — ${mixture.volume.value} mL, ${species
      .filter((one) => concentration[one]!.value !== 0)
      .map(romanName)
      .join('/')} — ${mixture.state.toUpperCase()}`,
    ...mixture.findings.filter(({ severity }) => severity !== 'note').map(findingText),
    ...mixture.portions.map((portion) => row(portion.stock, portionText(portion))),
    ...mixture.steps.map((step, i) => row(`step ${i + 1}`, step)),
    ...(mixture.reactions.length > 0
      ? [
          row(
            'what reacts',
            `${mixture.reactions.map(({ equation, extent }) => `${equation}, ${(1000 * extent).toPrecision(3)} mmol`).join('; ')}: ${mixture.heat.toPrecision(2)} kJ, at most +${mixture.warming.toFixed(1)} K`,
          ),
        ]
      : mixture.warming > 1
        ? [row('warms by', `at most ${mixture.warming.toFixed(0)} K where nothing cools it`)]
        : []),
    row(
      label,
      species
        .map(
          (one) => `${romanName(one)} ${concentrationText(concentration[one]!.value, concentration[one]!.uncertainty)}`,
        )
        .join(', ') + ' mol/L',
    ),
    row('total vanadium', `${quantityText(totalVanadium.value, totalVanadium.uncertainty)} mol/L`),
    row('mean oxidation state', quantityText(averageOxidationState.value, averageOxidationState.uncertainty)),
    ...(stateOfCharge.value === null
      ? []
      : [row('state of charge', `${percentText(stateOfCharge.value, stateOfCharge.uncertainty)} % (${mixture.side})`)]),
    ...(sulfate === null
      ? []
      : [row('acid', `${sulfate.toFixed(2)} mol/L total sulfate, ${freeAcid!.toFixed(2)} mol/L of it free acid`)]),
    ...budgetText(mixture),
    ...(mixture.assumed.length > 0 ? [row('assumed', mixture.assumed.join('; '))] : []),
    ...mixture.findings.filter(({ severity }) => severity === 'note').map(findingText),
    '',
  ].join('\n');
}

function portionText({ volume, mass, uncertainty, unit, by }: Portion): string {
  const decimals = decimalsFor(uncertainty);
  return unit === 'g'
    ? `${mass!.toFixed(Math.min(3, decimals))} g by ${by}${volume > 0 ? ` (${volume.toFixed(2)} mL)` : ''}`
    : `${volume.toFixed(Math.min(2, decimals))} mL, ${by} (± ${uncertainty.toFixed(decimals)})`;
}

function budgetText({ budget, totalVanadium }: Mixture): string[] {
  const total = totalVanadium.value;
  if (budget.length === 0 || !total) return [];
  const largest = [...budget].sort((a, b) => b.totalVanadium - a.totalVanadium).slice(0, 3);
  return [
    row(
      'where U comes from',
      largest
        .map(
          ({ source, totalVanadium: c, averageOxidationState }) =>
            `${source} ${((100 * c) / total).toFixed(2)} % of total, ${(100 * averageOxidationState).toFixed(2)} points`,
        )
        .join('; '),
    ),
  ];
}

function stagesText(stages: readonly ElectrolysisStage[]): string[] {
  if (stages.length === 0) return [];
  return [
    'on the way',
    ...stages.map(({ holds, colour, charge, hours, averageOxidationState }) =>
      row(
        `${charge.toFixed(3)} Ah${hours === null ? '' : `, ${hours.toFixed(2)} h`}`,
        `${holds} (${averageOxidationState.toFixed(2)}): ${colour}`,
      ),
    ),
    '',
  ];
}
