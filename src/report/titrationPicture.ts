import { scaleLinear } from 'd3-scale';
import { line } from 'd3-shape';
import type { EndPoint, TitrationRunResult } from '../bench/titration/titrationResult.ts';
import type { Picture } from './benchReport.ts';
import { coordinate, escapeXml } from './xml.ts';

const WIDTH = 960;
const LEFT = 70;
const RIGHT = 20;
const CURVE_HEIGHT = 300;
const ROW = 20;
const INK = '#1a1a1a';
const QUIET = '#6b6b6b';
const CURVE = '#2f5d7c';
const MARK = '#8a4b08';

/** The readings of one run with its end points, and below how far each way of finding them lies from their combination. */
export function titrationPicture(run: TitrationRunResult): Picture {
  const methods = run.endPoints.flatMap((endPoint, j) => endPoint.methods.map((method) => ({ endPoint, method, j })));
  const height = 30 + CURVE_HEIGHT + 40 + (methods.length > 0 ? 50 + ROW * methods.length : 0);
  const { volume, potential } = run.curve;
  const x = scaleLinear([0, volume.at(-1)!], [LEFT, WIDTH - RIGHT]);
  // The first reading, before any titrant, is often far off: it may leave the picture.
  const [low, high] = [Math.min(...potential.slice(1)), Math.max(...potential.slice(1))];
  const y = scaleLinear([low - 20, high + 20], [20 + CURVE_HEIGHT, 20]);
  const title = `${run.run}: ${run.course}`;
  const shown = volume.flatMap((v, i) => (i === 0 && potential[0]! < low - 20 ? [] : [[v, potential[i]!] as const]));
  const path = line<readonly [number, number]>(
    ([v]) => Number(coordinate(x(v))),
    ([, E]) => Number(coordinate(y(E))),
  )(shown);
  return {
    svg: [
      `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="${escapeXml(title)}" font-family="system-ui, sans-serif" font-size="12">`,
      `<text x="${LEFT}" y="14" fill="${INK}">${escapeXml(title)}, potential in mV against titrant in mL</text>`,
      ...y.ticks(6).map((tick) => label(LEFT - 8, y(tick) + 4, String(tick), 'end')),
      ...x.ticks(10).map((tick) => label(x(tick), 38 + CURVE_HEIGHT, String(tick), 'middle')),
      `<path d="${path ?? ''}" fill="none" stroke="${CURVE}" stroke-opacity="0.5"/>`,
      ...shown.map(([v, E]) => `<circle cx="${coordinate(x(v))}" cy="${coordinate(y(E))}" r="2" fill="${CURVE}"/>`),
      ...run.endPoints.map((endPoint, j) => endPointMark(endPoint, j, x)),
      ...(methods.length > 0 ? methodRows(methods, 30 + CURVE_HEIGHT + 40) : []),
      '</svg>',
    ].join('\n'),
    caption: `Upright lines: combined end points. Below: each way of finding them, from the combination, with its 95 % interval; an interval without a bar is wider than the picture.`,
  };
}

const label = (x: number, y: number, text: string, anchor: 'start' | 'middle' | 'end'): string =>
  `<text x="${coordinate(x)}" y="${coordinate(y)}" text-anchor="${anchor}" fill="${QUIET}">${escapeXml(text)}</text>`;

function endPointMark({ volume, uncertainty, step }: EndPoint, j: number, x: (v: number) => number): string {
  const at = coordinate(x(volume));
  return [
    `<line x1="${at}" x2="${at}" y1="20" y2="${20 + CURVE_HEIGHT}" stroke="${MARK}" stroke-dasharray="5 3"/>`,
    `<text x="${coordinate(x(volume) - 6)}" y="${36 + 16 * j}" text-anchor="end" fill="${MARK}">${escapeXml(`${step} ${volume.toFixed(3)} ± ${uncertainty.toFixed(3)} mL`)}</text>`,
  ].join('\n');
}

function methodRows(
  methods: readonly { endPoint: EndPoint; method: EndPoint['methods'][number]; j: number }[],
  top: number,
): string[] {
  // The widest interval that is not of the second derivative sets the scale, so that Gran's can be told apart.
  const reach = 4 * Math.max(...methods.map(({ endPoint }) => endPoint.uncertainty), 0.002);
  const x = scaleLinear([-reach, reach], [LEFT + 260, WIDTH - RIGHT]);
  const inside = (d: number): boolean => Math.abs(d) <= reach;
  return [
    label(LEFT, top, 'from the combined end point, mL', 'start'),
    ...x.ticks(6).map((tick) => label(x(tick), top + 18, tick.toFixed(3), 'middle')),
    `<line x1="${coordinate(x(0))}" x2="${coordinate(x(0))}" y1="${top + 24}" y2="${top + 24 + ROW * methods.length}" stroke="${MARK}" stroke-dasharray="5 3"/>`,
    ...methods.flatMap(({ endPoint, method, j }, i) => {
      const y = top + 38 + ROW * i;
      const d = method.volume - endPoint.volume;
      const [from, to] = method.interval ?? [NaN, NaN];
      const [low, high] = [from - endPoint.volume, to - endPoint.volume];
      return [
        `<text x="${LEFT}" y="${y + 4}" fill="${INK}">${escapeXml(`${j + 1}: ${method.method} ${method.volume.toFixed(3)} ± ${method.uncertainty.toFixed(3)}`)}</text>`,
        ...(inside(low) && inside(high)
          ? [
              `<line x1="${coordinate(x(low))}" x2="${coordinate(x(high))}" y1="${y}" y2="${y}" stroke="${CURVE}" stroke-width="2"/>`,
            ]
          : []),
        inside(d)
          ? `<circle cx="${coordinate(x(d))}" cy="${y}" r="4" fill="${CURVE}"/>`
          : `<path d="M${coordinate(x(Math.sign(d) * reach))} ${y}l${-8 * Math.sign(d)} -4v8z" fill="${CURVE}"/>`,
      ];
    }),
  ];
}
