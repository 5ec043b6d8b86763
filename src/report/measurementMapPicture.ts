import { scaleLog } from 'd3-scale';
import type { MeasurementPlan, PlannedCandidate } from '../bench/planning/planMeasurement.ts';
import type { Picture } from './benchReport.ts';
import { coordinate, escapeXml } from './xml.ts';

const WIDTH = 960;
const LEFT = 130;
const TOP = 50;
const ROW = 44;

/** u(S) of one filling over cells and dilutions: the darker the field the surer; words say what cannot be used. */
export function measurementMapPicture({ candidates, advice, wish }: MeasurementPlan): Picture {
  const cells = [...new Map(candidates.map((c) => [c.cell, c.pathLength]))]
    .sort((a, b) => a[1] - b[1])
    .map(([name]) => name);
  const dilutions = [...new Set(candidates.map(({ dilution }) => dilution))].sort((a, b) => a - b);
  const width = (WIDTH - LEFT - 10) / dilutions.length;
  const height = TOP + cells.length * ROW + 10;
  const shade = scaleLog([0.001, 0.05], ['#8fb4cc', '#ffffff']).clamp(true);
  const field = (candidate: PlannedCandidate): string => {
    const x = LEFT + dilutions.indexOf(candidate.dilution) * width;
    const y = TOP + cells.indexOf(candidate.cell) * ROW;
    const isUsable = candidate.grade !== 'dark' && candidate.grade !== 'faint';
    const fill = isUsable ? shade(candidate.uncertainty!.stateOfCharge) : '#f3f1ec';
    const words = isUsable ? (100 * candidate.uncertainty!.stateOfCharge).toFixed(2) : candidate.grade;
    const mark = candidate.grade === 'repeat' ? ` × ${candidate.fillings}` : '';
    const isAdvice = candidate === advice;
    return [
      `<rect x="${coordinate(x + 1)}" y="${y + 1}" width="${coordinate(width - 2)}" height="${ROW - 2}" fill="${fill}" stroke="${isAdvice ? '#1a1a1a' : '#d5d2ca'}" stroke-width="${isAdvice ? 3 : 1}"/>`,
      `<text x="${coordinate(x + width / 2)}" y="${y + ROW / 2 + 5}" text-anchor="middle" fill="${isUsable ? '#1a1a1a' : '#6b6b6b'}">${words}${mark}</text>`,
    ].join('\n');
  };
  return {
    svg: [
      `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="uncertainty of the state of charge by cell and dilution" font-family="system-ui, sans-serif" font-size="13">`,
      `<text x="${LEFT}" y="18" fill="#1a1a1a">dilution, tank over cuvette</text>`,
      ...dilutions.map(
        (dilution, j) =>
          `<text x="${coordinate(LEFT + (j + 0.5) * width)}" y="${TOP - 10}" text-anchor="middle" fill="#1a1a1a">${Number(dilution.toPrecision(4))}</text>`,
      ),
      ...cells.map(
        (cell, i) =>
          `<text x="${LEFT - 12}" y="${TOP + i * ROW + ROW / 2 + 5}" text-anchor="end" fill="#1a1a1a">${escapeXml(cell)}</text>`,
      ),
      ...candidates.map(field),
      '</svg>',
    ].join('\n'),
    caption: `Standard uncertainty of the state of charge in points after one filling, wished for: ${(100 * wish.stateOfCharge).toFixed(2)}. The heavy frame is the advice; × n: fillings that reach the wish; dark and faint: an assay would withhold it.`,
  };
}
