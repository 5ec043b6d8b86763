import { scaleLinear } from 'd3-scale';
import type { AssayResult } from '../../assay/result.ts';
import { percentText } from '../quantityText.ts';
import { STATE_WORD } from '../words.ts';
import { at, VerticalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 52;
const RIGHT = 742;
const TOP = 30;
const END = 250;
const STRIP = 270;

/** State of charge of many samples in the order of the document, with 95 % intervals; withheld ones in a strip of their own. Composites have none. */
export function SamplesPicture({ id, assays: all }: { id: string; assays: readonly AssayResult[] }) {
  const assays = all.filter(({ side }) => side !== 'composite');
  if (assays.length === 0) return null;
  const x = scaleLinear([0, assays.length - 1], [LEFT + 12, RIGHT - 12]);
  const intervals = assays.flatMap(({ stateOfCharge }) => stateOfCharge.interval ?? []).map((share) => 100 * share);
  const y = scaleLinear([Math.min(0, ...intervals), Math.max(100, ...intervals)], [END, TOP]);
  const count = (state: AssayResult['state']) => assays.filter((assay) => assay.state === state).length;
  return (
    <Picture
      id={id}
      question="What charge does each sample hold, and which can be trusted?"
      answer={`Of ${assays.length} samples of the two sides ${count('sound')} are sound, ${count('caution')} are to be used with caution and ${count('withheld')} were withheld.`}
      width={WIDTH}
      height={312}
      numbers={{
        columns: ['sample', 'side', 'state of charge, %', 'state'],
        rows: assays.map((assay) => [
          assay.sample,
          assay.side,
          assay.side === 'composite' ? '–' : percentText(assay.stateOfCharge.value, assay.stateOfCharge.uncertainty),
          STATE_WORD[assay.state],
        ]),
      }}
    >
      <VerticalAxis scale={y} x={LEFT} label="state of charge, % (95 % intervals)" rulesTo={RIGHT} />
      {assays.map((assay, i) => (
        <Mark key={i} assay={assay} x={at(x(assays.length === 1 ? 0.5 : i))} y={(share) => at(y(100 * share))} />
      ))}
      <text class="soft" x={LEFT} y={STRIP + 30}>
        ● negative, sound ○ negative, caution ■ positive, sound □ positive, caution × withheld
      </text>
    </Picture>
  );
}

function Mark({ assay, x, y }: { assay: AssayResult; x: number; y: (share: number) => number }) {
  const { value, interval } = assay.stateOfCharge;
  if (value === null || interval === null)
    return assay.state === 'withheld' ? (
      <path class="ink-line" stroke-width="1.6" d={`M${x - 4} ${STRIP - 4}l8 8m0 -8l-8 8`} />
    ) : null;
  const fill = assay.state === 'sound' ? 'ink-line ink-fill' : 'ink-line raised-fill';
  return (
    <g>
      <path class="ink-line" d={`M${x} ${y(interval[0])}V${y(interval[1])}`} />
      {assay.side === 'negative' ? (
        <circle class={fill} cx={x} cy={y(value)} r="3.4" />
      ) : (
        <rect class={fill} x={x - 3.2} y={y(value) - 3.2} width="6.4" height="6.4" />
      )}
    </g>
  );
}
