import { scaleLinear } from 'd3-scale';
import { line } from 'd3-shape';
import type { ChartPoint, CheckStandardChart } from '../bench/chart/checkStandardChart.ts';
import type { Picture } from './benchReport.ts';
import { coordinate, escapeXml } from './xml.ts';

const WIDTH = 960;
const LEFT = 70;
const RIGHT = 64;
const PANEL = 170;
const GAP = 46;
const INK = '#1a1a1a';
const QUIET = '#6b6b6b';
const ALARM = '#b3261e';
const CURVE = '#2f5d7c';

interface Panel {
  readonly title: string;
  readonly series: readonly { readonly values: readonly (number | null)[]; readonly dash?: string }[];
  /** dashed lines with what they are */
  readonly limits: readonly { readonly at: number; readonly label: string }[];
  readonly marksSignal: (point: ChartPoint) => boolean;
}

/** Deviations with their limits, the moving average and both cumulative sums, one under another, against time. */
export function chartPicture(chart: CheckStandardChart): Picture {
  const { points, limits } = chart;
  const half = limits.movingAverage.halfWidth;
  const panels: Panel[] = [
    {
      title: 'deviation from the centre of its lot, s',
      series: [{ values: points.map(({ deviation }) => deviation) }],
      limits: [
        ...[-1, 1].flatMap((side) => [
          { at: side * limits.warning, label: 'warning' },
          { at: side * limits.action, label: 'action' },
        ]),
        { at: 0, label: 'centre' },
      ],
      marksSignal: ({ signals }) => signals.some((signal) => !/^(moving|cumulative)/.test(signal)),
    },
    {
      title: 'moving average, s',
      series: [{ values: points.map(({ movingAverage }) => movingAverage) }],
      limits: [-half, half].map((at) => ({ at, label: 'limit' })),
      marksSignal: ({ signals }) => signals.includes('moving-average'),
    },
    {
      title: 'cumulative sums (solid: up, dashed: down), s',
      series: [
        { values: points.map(({ sumUp }) => sumUp) },
        { values: points.map(({ sumDown }) => (sumDown === null ? null : -sumDown)), dash: '6 3' },
      ],
      limits: [-1, 1].map((side) => ({ at: side * limits.cumulativeSum.limit, label: 'limit' })),
      marksSignal: ({ signals }) => signals.includes('cumulative-sum'),
    },
  ];
  const height = panels.length * (PANEL + GAP) + 10;
  const last = points[points.length - 1]!.hours || 1;
  const x = scaleLinear([0, last], [LEFT, WIDTH - RIGHT]);
  const title = `Check standard, ${chart.quantity}: ${chart.state}`;
  return {
    svg: [
      `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="${escapeXml(title)}" font-family="system-ui, sans-serif" font-size="12">`,
      ...panels.flatMap((panel, i) => panelMarks(panel, points, x, GAP - 16 + i * (PANEL + GAP))),
      ...lotMarks(points, x, height),
      '</svg>',
    ].join('\n'),
    caption: `${points[0]!.at} to ${chart.latest}. Lines break where a day is missing; triangles are points that signal; vertical lines begin a new lot. s = ${chart.baseline.standardDeviation.toPrecision(2)}${chart.unit && ` ${chart.unit}`}.`,
  };
}

type Scale = (value: number) => number;

function panelMarks(panel: Panel, points: readonly ChartPoint[], x: Scale, top: number): string[] {
  const values = panel.series.flatMap((series) => series.values).filter((value) => value !== null);
  const extent = Math.max(...panel.limits.map(({ at }) => Math.abs(at)), largest(values)) * 1.08;
  const y = scaleLinear([-extent, extent], [top + PANEL, top]);
  const curve = (series: readonly (number | null)[]): string =>
    line<number | null>()
      .defined((value) => value !== null)
      .x((_, i) => Number(coordinate(x(points[i]!.hours))))
      .y((value) => Number(coordinate(y(value!))))(series) ?? '';
  return [
    `<text x="${LEFT}" y="${top - 8}" fill="${INK}">${escapeXml(panel.title)}</text>`,
    ...y
      .ticks(5)
      .map(
        (tick) =>
          `<text x="${LEFT - 8}" y="${coordinate(y(tick) + 4)}" text-anchor="end" fill="${QUIET}">${tick}</text>`,
      ),
    ...panel.limits.flatMap(({ at, label }) => [
      `<line x1="${LEFT}" x2="${WIDTH - RIGHT}" y1="${coordinate(y(at))}" y2="${coordinate(y(at))}" stroke="${QUIET}" stroke-dasharray="${label === 'centre' ? 'none' : '4 4'}"/>`,
      `<text x="${WIDTH - RIGHT + 5}" y="${coordinate(y(at) + 4)}" fill="${QUIET}" font-size="10">${label}</text>`,
    ]),
    ...panel.series.map(
      ({ values: series, dash }) =>
        `<path d="${curve(series)}" fill="none" stroke="${CURVE}" stroke-width="1.5"${dash ? ` stroke-dasharray="${dash}"` : ''}/>`,
    ),
    ...points.flatMap((point, i) => {
      if (!panel.marksSignal(point)) return [];
      const shown = panel.series
        .map((series) => series.values[i]!)
        .reduce((a, b) => (Math.abs(b) > Math.abs(a) ? b : a));
      return [triangle(x(point.hours), y(shown))];
    }),
  ];
}

const largest = (values: readonly number[]): number =>
  values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);

const triangle = (cx: number, cy: number): string =>
  `<path d="M${coordinate(cx)} ${coordinate(cy - 5)}l4.5 8h-9z" fill="none" stroke="${ALARM}" stroke-width="1.5"/>`;

function lotMarks(points: readonly ChartPoint[], x: Scale, height: number): string[] {
  return points.flatMap(({ lot, hours }, i) => {
    if (i === 0 || points[i - 1]!.lot === lot) return [];
    const at = coordinate(x(hours));
    return [
      `<line x1="${at}" x2="${at}" y1="20" y2="${height - 10}" stroke="${QUIET}" stroke-width="0.8"/>`,
      `<text x="${at}" y="14" text-anchor="middle" fill="${INK}">lot ${escapeXml(lot)}</text>`,
    ];
  });
}
