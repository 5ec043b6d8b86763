import { scaleLinear } from 'd3-scale';
import type { Mixture } from '../bench/mixing/mixResult.ts';
import type { Picture } from './benchReport.ts';
import { coordinate, escapeXml } from './xml.ts';

const WIDTH = 960;
const LEFT = 180;
const RIGHT = 20;
const ROW = 40;
const INK = '#1a1a1a';
const QUIET = '#6b6b6b';
/** Light enough for dark words on every one of them; told apart by the words, not by the colour. */
const FILLS = ['#dfe8ee', '#f1e3cf', '#e3edd8', '#eadff0', '#f4f4f0'];

/** What goes into each bottle, in proportion to its volume. */
export function mixPicture(mixtures: readonly Mixture[]): Picture {
  const names = [...new Set(mixtures.flatMap(({ portions }) => portions.map(({ stock }) => stock)))];
  const height = 30 + ROW * mixtures.length;
  return {
    svg: [
      `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="portions of each bottle" font-family="system-ui, sans-serif" font-size="12">`,
      `<text x="${LEFT}" y="14" fill="${QUIET}">share of the volume</text>`,
      ...mixtures.flatMap((mixture, i) => bottle(mixture, names, 24 + ROW * i)),
      '</svg>',
    ].join('\n'),
    caption:
      'Portions as they are measured out; solids have no volume here. The last one is what the flask is made up with.',
  };
}

function bottle({ name, portions }: Mixture, names: readonly string[], top: number): string[] {
  const total = portions.reduce((sum, { volume }) => sum + volume, 0);
  const x = scaleLinear([0, total], [LEFT, WIDTH - RIGHT]);
  let at = 0;
  return [
    `<text x="${LEFT - 8}" y="${top + 18}" text-anchor="end" fill="${INK}">${escapeXml(name)}</text>`,
    ...portions.flatMap(({ stock, volume }) => {
      const from = x(at);
      at += volume;
      const width = x(at) - from;
      if (volume === 0) return [];
      return [
        `<rect x="${coordinate(from)}" y="${top}" width="${coordinate(width)}" height="28" fill="${FILLS[names.indexOf(stock) % FILLS.length]}" stroke="${QUIET}"/>`,
        // Words only where they fit.
        ...(width > 7 * (stock.length + 8)
          ? [
              `<text x="${coordinate(from + 6)}" y="${top + 18}" fill="${INK}">${escapeXml(`${stock} ${Number(volume.toFixed(2))} mL`)}</text>`,
            ]
          : []),
      ];
    }),
  ];
}
