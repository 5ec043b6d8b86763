import type { MeasurementPlan, PlannedCandidate } from '../bench/planning/planMeasurement.ts';
import { millimetresFromCentimetres } from '../units.ts';
import { findingText } from './assayText.ts';
import { wrapped } from './quantityText.ts';

const WIDTH = 80;

/** A measurement plan for a terminal: what to do, where the uncertainty comes from, the map of u(S) over path and dilution. */
export function measurementPlanText(plan: MeasurementPlan): string {
  const { sample, advice } = plan;
  const charge = `${(100 * sample.stateOfCharge).toFixed(0)} %`;
  return [
    wrapped(
      `${sample.side}, about ${sample.totalVanadium} mol/L at ${charge} — ${advice ? adviceText(plan, advice) : 'NO CELL AT HAND WILL DO'}`,
      WIDTH,
      '  ',
    ),
    ...plan.findings.map(findingText),
    '',
    ...(advice ? [...adviceLines(advice), ...priceLines(plan, advice), ''] : []),
    ...mapLines(plan.candidates),
    ...plan.wouldHelp.map(
      (candidate) => `would help: ${placeText(candidate)} gives ${points(candidate.uncertainty!.stateOfCharge)} points`,
    ),
    '',
    `assumed: ${wrapped(plan.assumed.join('; '), WIDTH - 9, '  ')}`,
    '',
  ].join('\n');
}

function adviceText({ wish }: MeasurementPlan, advice: PlannedCandidate): string {
  if (advice.fillings === null)
    return `BEST AT HAND: ${placeText(advice)}; ${points(wish.stateOfCharge)} points are out of reach`;
  return `USE ${placeText(advice)}, ${advice.fillings === 1 ? 'one filling' : `${advice.fillings} fillings`}`;
}

function placeText({ cell, pathLength, dilution, glassware }: PlannedCandidate): string {
  const path = `${Number(millimetresFromCentimetres(pathLength).toPrecision(4))} mm`;
  const where = cell === path ? `the ${path} cell` : `cell ${cell} (${path})`;
  return `${where}, ${dilution === 1 ? 'undiluted' : `diluted 1:${dilution}${glassware && ` (${glassware})`}`}`;
}

const points = (share: number): string => (100 * share).toFixed(2);

function adviceLines(advice: PlannedCandidate): string[] {
  const { uncertainty, uncertaintyAfterFillings: after, fillings, sufficientRange, budget } = advice;
  const state = ({ stateOfCharge, totalVanadium }: NonNullable<PlannedCandidate['uncertainty']>) =>
    `u(S) ${points(stateOfCharge)} points, u(total vanadium) ${(100 * totalVanadium).toFixed(2)} %`;
  return [
    `one filling         ${state(uncertainty!)}`,
    ...(after && fillings! > 1 ? [`${`${fillings} fillings`.padEnd(20)}${state(after)}`] : []),
    `largest absorbance  ${advice.largestAbsorbance.toFixed(2)}`,
    ...(sufficientRange
      ? [`shortest range      ${sufficientRange.join(' to ')} nm costs a tenth of that at most`]
      : []),
    'made up of',
    ...budget
      .filter(({ stateOfCharge, totalVanadium }) => stateOfCharge >= 5e-5 || totalVanadium >= 5e-5)
      .map(
        (line) =>
          `  ${line.source.padEnd(40)}${points(line.stateOfCharge).padStart(6)} points${(100 * line.totalVanadium).toFixed(2).padStart(7)} %${line.isRandom ? '   averages' : ''}`,
      ),
  ];
}

/** What the uncertainty does not show [common practice]. */
function priceLines({ undiluted, sample }: MeasurementPlan, advice: PlannedCandidate): string[] {
  const air = sample.side === 'negative' ? ', sparged: dissolved air takes V(II)' : '';
  return [
    ...(advice.dilution > 1 ? [`price               glassware, and the same acid${air}`] : []),
    ...(advice.pathLength < 0.03
      ? ['price               a thin cell: its path differs between fillings, see total vanadium']
      : []),
    ...(undiluted
      ? [
          `or without dilution ${placeText(undiluted)}: u(S) ${points(undiluted.uncertainty!.stateOfCharge)} points, u(total vanadium) ${(100 * undiluted.uncertainty!.totalVanadium).toFixed(2)} %`,
        ]
      : []),
  ];
}

const MARK = { good: ' ', repeat: '+', short: '-', faint: 'f', dark: '#' } as const;
const PER_BLOCK = 9;

/** u(S) in points; rows cells by path, columns dilutions. */
function mapLines(candidates: readonly PlannedCandidate[]): string[] {
  const cells = [...new Map(candidates.map((c) => [c.cell, c.pathLength]))].sort((a, b) => a[1] - b[1]);
  const dilutions = [...new Set(candidates.map(({ dilution }) => dilution))].sort((a, b) => a - b);
  const at = new Map(candidates.map((c) => [`${c.cell}\n${c.dilution}`, c]));
  const blocks = Array.from({ length: Math.ceil(dilutions.length / PER_BLOCK) }, (_, b) =>
    dilutions.slice(b * PER_BLOCK, (b + 1) * PER_BLOCK),
  );
  return [
    'u(S) in points after one filling, by cell and dilution',
    ...blocks.flatMap((block) => [
      `  ${'dilution'.padEnd(14)}${block.map((dilution) => String(Number(dilution.toPrecision(4))).padStart(6)).join(' ')}`,
      ...cells.map(([cell]) =>
        `  ${cell.slice(0, 14).padEnd(14)}${block.map((dilution) => mapCell(at.get(`${cell}\n${dilution}`)!)).join(' ')}`.trimEnd(),
      ),
    ]),
    '  + with several fillings   - never reaches the wish   f too faint   # too dark',
  ];
}

function mapCell({ grade, uncertainty }: PlannedCandidate): string {
  if (grade === 'dark' || !uncertainty) return `${MARK[grade].padStart(5)} `;
  const value = uncertainty.stateOfCharge >= 0.1 ? '> 10' : points(uncertainty.stateOfCharge);
  return `${value.padStart(5)}${MARK[grade]}`;
}
