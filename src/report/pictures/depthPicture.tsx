import type { AssayResult } from '../../assay/result.ts';
import { colourThrough, type SeenColour } from '../../electrolyte/colour.ts';
import { SIDE_WORD, pathText } from '../words.ts';
import { at } from './axes.tsx';
import { Picture } from './picture.tsx';

/** cm; cells and vials that people own */
const DEPTHS = [0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1] as const;
const WIDTH = 760;
const LEFT = 150;
const BAND = 84;
const ROW = 74;

/** The colour of each tank through liquid of growing depth, with the white of daylight beside it. */
export function DepthPicture({ id, assays }: { id: string; assays: readonly AssayResult[] }) {
  const rows = assays.flatMap((assay) => {
    const tank = assay.fit?.tank;
    if (!tank || assay.state === 'withheld') return [];
    const colours = DEPTHS.map((depth) =>
      colourThrough(
        tank.wavelength,
        tank.absorbancePerCentimetre.map((value) => depth * value),
      ),
    );
    return [{ name: `${assay.sample} (${SIDE_WORD[assay.side]})`, label: SIDE_WORD[assay.side], colours }];
  });
  if (rows.length === 0) return null;
  return (
    <Picture
      id={id}
      question="What should each tank look like, held to the light?"
      answer={`Computed for undiluted electrolyte before a white lamp (CIE 1931, D65), from the fitted composition: ${rows.map((row) => `${row.name} is ${inWords(row.colours[3]!)} at 1 mm and ${inWords(row.colours[6]!)} at 10 mm`).join('; ')}. ${filledSentence(rows[0]!.colours[0]!)}`}
      width={WIDTH}
      height={30 + rows.length * ROW + 24}
      numbers={{
        columns: ['tank', ...DEPTHS.map(pathText)],
        rows: rows.map((row) => [row.name, ...row.colours.map((colour) => colour.hex)]),
      }}
    >
      <text class="soft end" x={LEFT - 12} y={16}>
        seen through
      </text>
      {DEPTHS.map((depth, k) => (
        <text key={depth} class="soft middle" x={at(LEFT + (k + 0.5) * BAND)} y={16}>
          {pathText(depth)}
        </text>
      ))}
      {rows.map((row, i) => (
        <g key={row.name} class="colour-shown">
          <text class="end strong" x={LEFT - 12} y={30 + i * ROW + 36}>
            {row.label}
          </text>
          <rect class="axis" x={LEFT} y={26 + i * ROW} width={7 * BAND} height={ROW - 10} fill="#ffffff" />
          {row.colours.map((colour, k) => (
            <rect key={k} x={LEFT + k * BAND} y={26 + i * ROW + 14} width={BAND} height={ROW - 24} fill={colour.hex} />
          ))}
          <rect class="axis" x={LEFT} y={26 + i * ROW} width={7 * BAND} height={ROW - 10} />
        </g>
      ))}
      <text class="soft" x={LEFT} y={30 + rows.length * ROW + 10}>
        The strip above each row is the lamp alone: white.
      </text>
    </Picture>
  );
}

function filledSentence({ filled }: SeenColour): string {
  if (filled.below === null && filled.above === null) return '';
  const parts = [
    ...(filled.below === null ? [] : [`below ${filled.below} nm`]),
    ...(filled.above === null ? [] : [`above ${filled.above} nm`]),
  ];
  return `The calibration says nothing ${parts.join(' and ')}; the nearest value was used there.`;
}

/** Lab bounds of plain words; hue sectors as people name them at the bench (ours). */
export function inWords({ lab: [lightness, a, b] }: SeenColour): string {
  const chroma = Math.hypot(a, b);
  if (lightness < 4) return 'black';
  const depth = lightness < 25 ? 'very dark ' : lightness < 50 ? 'dark ' : lightness > 88 ? 'pale ' : '';
  if (chroma < 4) return lightness > 95 ? 'nearly clear' : `${depth}grey`;
  const hue = ((Math.atan2(b, a) * 180) / Math.PI + 360) % 360;
  const name = HUES.find(([to]) => hue < to)![1];
  return `${depth}${name}`;
}

const HUES: readonly (readonly [to: number, name: string])[] = [
  [25, 'pink red'],
  [50, 'red brown'],
  [75, 'orange'],
  [108, 'yellow'],
  [135, 'yellow green'],
  [170, 'green'],
  [205, 'blue green'],
  [285, 'blue'],
  [325, 'violet'],
  [361, 'pink red'],
];
