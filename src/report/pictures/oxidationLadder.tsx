import { scaleLinear } from 'd3-scale';
import type { Quantity } from '../../assay/result.ts';
import { quantityText } from '../quantityText.ts';
import { at, HorizontalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

/** Mean oxidation states with k = 1 uncertainties; null values are withheld and not drawn. */
export interface Ladder {
  readonly negative: Quantity;
  readonly positive: Quantity;
  /** of both tanks together, weighted with their vanadium, where volumes are known */
  readonly both?: Quantity;
  /** what both together should have */
  readonly target?: number;
}

const WIDTH = 760;
const LEFT = 30;
const RIGHT = 730;
const ENLARGED_END = 300;

/** The lead of the positive side in points of state of charge with its expanded uncertainty (k = 2); null where a side is withheld. */
export function leadOf({ negative, positive }: Ladder): { points: number; expanded: number } | null {
  if (negative.value === null || positive.value === null) return null;
  return {
    points: 100 * (positive.value - 4 - (3 - negative.value)),
    expanded: 200 * Math.hypot(negative.uncertainty ?? 0, positive.uncertainty ?? 0),
  };
}

export function leadSentence(ladder: Ladder): string {
  const lead = leadOf(ladder);
  if (!lead) return 'One side was withheld, so the sides cannot be compared.';
  const ahead = lead.points >= 0 ? 'positive' : 'negative';
  const size = `${Math.abs(lead.points).toFixed(1)} points of charge, uncertain by ${lead.expanded.toFixed(1)} (95 %)`;
  return Math.abs(lead.points) > lead.expanded
    ? `The ${ahead} side is ahead by ${size}.`
    : `No side can be told to be ahead: the ${ahead} one leads by ${size}.`;
}

/** One axis of oxidation states; the negative side's mirror image about 3.5 falls on the positive side when they are equally charged. */
export function OxidationLadder({ id, ladder }: { id: string; ladder: Ladder }) {
  const values = [ladder.negative, ladder.positive].flatMap(({ value }) => (value === null ? [] : [value]));
  const scale = scaleLinear([Math.min(2, ...values) - 0.02, Math.max(5, ...values) + 0.02], [LEFT, RIGHT]);
  const axisY = 150;
  const mirrored: Quantity = {
    value: ladder.negative.value === null ? null : 7 - ladder.negative.value,
    uncertainty: ladder.negative.uncertainty,
  };
  const rows: (readonly [string, Quantity])[] = [
    ['negative side', ladder.negative],
    ['positive side', ladder.positive],
    ...(ladder.both ? [['both together', ladder.both] as const] : []),
  ];
  return (
    <Picture
      id={id}
      question="Which side is ahead, and by how much?"
      answer={leadSentence(ladder)}
      width={WIDTH}
      height={ENLARGED_END + 44}
      numbers={{
        columns: ['', 'mean oxidation state', 'state of charge, %'],
        rows: rows.map(([name, { value, uncertainty }]) => [
          name,
          quantityText(value, uncertainty),
          name === 'both together' ? '–' : chargeText(name === 'negative side', value, uncertainty),
        ]),
      }}
    >
      <rect class="tint-V2" x={at(scale(2))} y={axisY - 14} width={at(scale(3) - scale(2))} height={14} />
      <rect class="grid-fill" x={at(scale(3))} y={axisY - 14} width={at(scale(4) - scale(3))} height={14} />
      <rect class="tint-V5" x={at(scale(4))} y={axisY - 14} width={at(scale(5) - scale(4))} height={14} />
      <text class="soft middle" x={at(scale(2.5))} y={axisY - 118}>
        negative: charged ← → empty
      </text>
      <text class="soft middle" x={at(scale(4.5))} y={axisY - 118}>
        positive: empty ← → charged
      </text>
      <HorizontalAxis
        scale={scale}
        y={axisY}
        label="mean oxidation state of vanadium"
        ticks={[2, 2.5, 3, 3.5, 4, 4.5, 5]}
        format={(tick) => ({ 2: 'V(II)', 3: 'V(III)', 4: 'V(IV)', 5: 'V(V)' })[tick] ?? tick.toFixed(1)}
      />
      <path class="limit" d={`M${at(scale(ladder.target ?? 3.5))} ${axisY}V${axisY - 70}`} />
      <text class="soft middle halo" x={at(scale(ladder.target ?? 3.5))} y={axisY - 76}>
        {ladder.target === undefined ? 'mirror line 3.5' : `wanted ${ladder.target}`}
      </text>
      <Rung scale={scale} y={axisY - 36} quantity={ladder.negative} name="negative" shape="filled" />
      <Rung scale={scale} y={axisY - 58} quantity={mirrored} name="negative, mirrored" shape="hollow" above />
      <Rung scale={scale} y={axisY - 36} quantity={ladder.positive} name="positive" shape="filled" />
      {ladder.both && <Rung scale={scale} y={axisY - 36} quantity={ladder.both} name="both" shape="diamond" />}
      <Enlarged ladder={ladder} />
    </Picture>
  );
}

/** Both charges on one scale that is only as wide as needed: the lead, where the ladder itself is too coarse to show it. */
function Enlarged({ ladder }: { ladder: Ladder }) {
  const toCharge = ({ value, uncertainty }: Quantity, of: (value: number) => number): Quantity => ({
    value: value === null ? null : 100 * of(value),
    uncertainty: uncertainty === null ? null : 100 * uncertainty,
  });
  const sides = [
    { name: 'negative', charge: toCharge(ladder.negative, (value) => 3 - value), y: ENLARGED_END - 58 },
    { name: 'positive', charge: toCharge(ladder.positive, (value) => value - 4), y: ENLARGED_END - 26 },
  ];
  const ends = sides.flatMap(({ charge: { value, uncertainty } }) =>
    value === null ? [] : [value - 2.5 * (uncertainty ?? 0), value + 2.5 * (uncertainty ?? 0)],
  );
  if (ends.length === 0) return null;
  const middle = (Math.min(...ends) + Math.max(...ends)) / 2;
  const reach = Math.max(2, (Math.max(...ends) - Math.min(...ends)) / 2);
  const scale = scaleLinear([middle - reach, middle + reach], [LEFT + 110, RIGHT - 20]);
  return (
    <g>
      {sides.map(({ name, charge: { value, uncertainty }, y }) => (
        <g key={name}>
          <text class="end strong" x={LEFT + 92} y={y + 4}>
            {name}
          </text>
          {value === null ? (
            <text class="soft" x={LEFT + 114} y={y + 4}>
              withheld
            </text>
          ) : (
            <g>
              <path
                class="ink-line"
                stroke-width="2"
                d={`M${at(scale(value - 2 * uncertainty!))} ${y}H${at(scale(value + 2 * uncertainty!))}m0 -5v10M${at(scale(value - 2 * uncertainty!))} ${y - 5}v10`}
              />
              <circle class="ink-fill" cx={at(scale(value))} cy={y} r={5.5} />
              <text class="middle halo" x={at(scale(value))} y={y - 9}>
                {`${quantityText(value, uncertainty)} %`}
              </text>
            </g>
          )}
        </g>
      ))}
      <HorizontalAxis scale={scale} y={ENLARGED_END} label="state of charge, %, enlarged; bars hold 95 %" />
    </g>
  );
}

function chargeText(isNegative: boolean, value: number | null, uncertainty: number | null): string {
  if (value === null || uncertainty === null) return 'withheld';
  return quantityText(100 * (isNegative ? 3 - value : value - 4), 100 * uncertainty);
}

interface RungProps {
  readonly scale: (value: number) => number;
  readonly y: number;
  readonly quantity: Quantity;
  readonly name: string;
  readonly shape: 'filled' | 'hollow' | 'diamond';
  readonly above?: boolean;
}

/** A mark with its 95 % interval and its name. */
function Rung({ scale, y, quantity: { value, uncertainty }, name, shape, above = false }: RungProps) {
  if (value === null) return null;
  const x = at(scale(value));
  const half = scale(value + 2 * (uncertainty ?? 0)) - scale(value);
  return (
    <g>
      <path
        class="ink-line"
        stroke-width={shape === 'hollow' ? 1.2 : 2}
        stroke-dasharray={shape === 'hollow' ? '3 2' : undefined}
        d={`M${at(x - half)} ${y}H${at(x + half)}M${at(x - half)} ${y - 5}v10M${at(x + half)} ${y - 5}v10`}
      />
      {shape === 'diamond' ? (
        <path class="ink-fill" d={`M${x} ${y - 7}l7 7l-7 7l-7 -7z`} />
      ) : (
        <circle class={shape === 'filled' ? 'ink-fill' : 'ink-line raised-fill'} cx={x} cy={y} r={5.5} />
      )}
      <text class={`middle halo${shape === 'hollow' ? ' soft' : ' strong'}`} x={x} y={above ? y - 12 : y + 19}>
        {name}
      </text>
    </g>
  );
}
