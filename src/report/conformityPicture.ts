import { scaleLinear } from 'd3-scale';
import type { InstrumentRecord, InstrumentTest } from '../assay/instrumentRecord.ts';
import type { Picture } from './benchReport.ts';
import { coordinate, escapeXml } from './xml.ts';

const WIDTH = 960;
const LEFT = 430;
const ROW = 26;
const TOP = 30;
const COLOUR = { passed: '#2c6e49', undecided: '#8a6d00', failed: '#b3261e' } as const;
/** Farthest place drawn, in half widths of the limits; beyond, an arrow. */
const EDGE = 1.6;

/** Every test as its value with 95 % interval against its limits, all limits drawn at the same two places. */
export function conformityPicture({ tests, state }: InstrumentRecord): Picture {
  const height = TOP + tests.length * ROW + 10;
  const x = scaleLinear([-EDGE, EDGE], [LEFT, WIDTH - 20]);
  return {
    svg: [
      `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="tests of the photometer against their limits: ${state}" font-family="system-ui, sans-serif" font-size="12">`,
      ...[-1, 1].flatMap((side) => [
        `<line x1="${coordinate(x(side))}" x2="${coordinate(x(side))}" y1="${TOP - 8}" y2="${height - 10}" stroke="#1a1a1a" stroke-dasharray="4 4"/>`,
        `<text x="${coordinate(x(side))}" y="${TOP - 14}" text-anchor="middle" fill="#1a1a1a">${side < 0 ? 'lower' : 'upper'} limit</text>`,
      ]),
      ...tests.flatMap((test, i) => rowOf(test, TOP + i * ROW + ROW / 2, x)),
      '</svg>',
    ].join('\n'),
    caption:
      'Bars hold 95 %. A test has passed when its bar lies inside its limits, has failed when it lies outside, and is undecided when a limit cuts it. An arrow stands for a value beyond the edge.',
  };
}

function rowOf(test: InstrumentTest, y: number, x: (value: number) => number): string[] {
  const place = placeBetweenLimits(test.limits);
  const [value, low, high] = [0, -1.96, 1.96].map((k) => place(test.value + k * test.uncertainty)) as [
    number,
    number,
    number,
  ];
  const inside = (at: number) => Math.max(-EDGE, Math.min(EDGE, at));
  const colour = COLOUR[test.conformity];
  const isBeyond = Math.abs(value) > EDGE;
  return [
    `<text x="${LEFT - 12}" y="${y + 4}" text-anchor="end" fill="#1a1a1a">${escapeXml(`${test.property} — ${test.conformity}`)}</text>`,
    `<line x1="${coordinate(x(inside(low)))}" x2="${coordinate(x(inside(high)))}" y1="${y}" y2="${y}" stroke="${colour}" stroke-width="3"/>`,
    isBeyond
      ? `<text x="${coordinate(x(inside(value)))}" y="${y + 5}" text-anchor="middle" fill="${colour}" font-size="16">${value > 0 ? '▸' : '◂'}</text>`
      : `<circle cx="${coordinate(x(value))}" cy="${y}" r="4.5" fill="#fff" stroke="${colour}" stroke-width="2"/>`,
  ];
}

/** Limits at −1 and 1; with one limit only, its distance from 0 is taken as the half width. */
function placeBetweenLimits([low, high]: InstrumentTest['limits']): (value: number) => number {
  if (low !== null && high !== null) return (value) => (2 * value - low - high) / (high - low);
  if (low !== null) return (value) => value / low - 2;
  return (value) => value / high!;
}
