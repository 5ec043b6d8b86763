import type { AssayDocument, AssayResult } from '../assay/result.ts';
import type { Finding } from '../finding.ts';
import { oxidationNumber, speciesOfPair, type Species } from '../electrolyte/species.ts';
import { millimetresFromCentimetres } from '../units.ts';
import { concentrationText, percentText, quantityText, wrapped } from './quantityText.ts';

const WIDTH = 80;
const LABEL = 24;

export const romanName = (species: Species): string => `V(${['II', 'III', 'IV', 'V'][oxidationNumber(species) - 2]})`;

/** All assays of a document for a terminal: what is wrong first, then numbers, then what was assumed. */
export function assayText(document: AssayDocument): string {
  return [
    ...document.assays.map(oneAssay),
    `± is the standard uncertainty (k = 1); intervals hold 95 % of the time.`,
    `calibration ${document.calibration.name} ${document.calibration.sha256.slice(0, 12)}`,
    '',
  ].join('\n');
}

function oneAssay(assay: AssayResult): string {
  const title = [assay.system, assay.sample].filter(Boolean).join(' / ');
  const [lower, higher] = speciesOfPair(assay.pair);
  const row = (label: string, text: string): string => `  ${label.padEnd(LABEL)}${text}`;
  const concentration = (species: Species): string => {
    const quantity = assay.concentration[species];
    return row(
      romanName(species),
      `${concentrationText(quantity?.value ?? null, quantity?.uncertainty ?? null)} mol/L`,
    );
  };
  const { stateOfCharge, averageOxidationState, totalVanadium } = assay;
  const interval = stateOfCharge.interval
    ? `   95 %: ${(100 * stateOfCharge.interval[0]).toFixed(1)} to ${(100 * stateOfCharge.interval[1]).toFixed(1)} %`
    : '';
  return [
    `${title} — ${assay.side}, ${romanName(lower)}/${romanName(higher)} — ${assay.state.toUpperCase()}`,
    ...assay.findings.filter((finding) => finding.severity !== 'note').map(findingText),
    ...(assay.side === 'composite'
      ? []
      : [row('state of charge', `${percentText(stateOfCharge.value, stateOfCharge.uncertainty)} %${interval}`)]),
    row('mean oxidation state', quantityText(averageOxidationState.value, averageOxidationState.uncertainty)),
    concentration(lower),
    concentration(higher),
    row('total vanadium', `${quantityText(totalVanadium.value, totalVanadium.uncertainty)} mol/L`),
    row('measured at', `${millimetresFromCentimetres(assay.pathLength)} mm, dilution ${assay.dilution}`),
    ...halvingLine(assay).map((text) =>
      row('to know it better', wrapped(text, WIDTH - LABEL - 2, ' '.repeat(LABEL + 2))),
    ),
    ...(assay.assumed.length > 0
      ? [row('assumed', wrapped(assay.assumed.join('; '), WIDTH - LABEL - 2, ' '.repeat(LABEL + 2)))]
      : []),
    ...assay.findings.filter((finding) => finding.severity === 'note').map(findingText),
    '',
  ].join('\n');
}

const MARK = { withhold: '!! withheld', caution: '!  caution', note: '   note' } as const;

export function findingText(finding: Finding): string {
  const indent = '     ';
  return [
    `${MARK[finding.severity]}: ${wrapped(`${finding.message} [${finding.code}]`, WIDTH - 12, indent)}`,
    `${indent}do ${wrapped(finding.hint, WIDTH - 8, `${indent}   `)}`,
  ].join('\n');
}

const ADVICE: readonly (readonly [RegExp, string])[] = [
  [/^between preparations/, 'standards from more preparations'],
  [/^calibration spectra/, 'more standards near this composition'],
  [/^pattern/, 'a second filling, and standards measured in the same cell'],
  [/^path/, 'the true path of this cell (fringes, or a known absorber)'],
  [/^dilution/, 'larger pipette and flask, or no dilution'],
  [/^noise/, 'a slower scan or a thicker cell'],
  [/^wavelength/, 'a checked wavelength scale'],
  [/^(offset|slope)/, 'a new blank in the same cell'],
  [/scatter$/, 'a settled or filtered sample'],
];

/** The largest term and what would make it smaller. */
function halvingLine(assay: AssayResult): string[] {
  const [largest] = assay.budget;
  if (!largest || assay.state === 'withheld') return [];
  const advice = ADVICE.find(([pattern]) => pattern.test(largest.source))?.[1] ?? 'more measurements';
  const points = (100 * largest.averageOxidationState).toFixed(2);
  return [`largest term ${largest.source} (${points} points): ${advice}`];
}
