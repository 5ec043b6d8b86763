import type { ScaleContinuousNumeric } from 'd3-scale';

export type Scale = ScaleContinuousNumeric<number, number>;

/** Coordinates to a tenth of a pixel: the same numbers give the same bytes. */
export const at = (coordinate: number): number => Math.round(10 * coordinate) / 10;

const tickText = (value: number): string => String(value).replace('-', '−');

interface AxisProps {
  readonly scale: Scale;
  readonly label: string;
  readonly ticks?: readonly number[];
  readonly format?: (value: number) => string;
  /** rules across the drawing reach to here */
  readonly rulesTo?: number;
}

export function HorizontalAxis({ scale, y, label, ticks, format = tickText, rulesTo }: AxisProps & { y: number }) {
  const [left, right] = scale.range() as [number, number];
  return (
    <g>
      {(ticks ?? scale.ticks(7)).map((tick) => (
        <g key={tick}>
          {rulesTo !== undefined && <path class="rule" d={`M${at(scale(tick))} ${at(y)}V${at(rulesTo)}`} />}
          <path class="axis" d={`M${at(scale(tick))} ${at(y)}v5`} />
          <text class="soft middle" x={at(scale(tick))} y={at(y + 18)}>
            {format(tick)}
          </text>
        </g>
      ))}
      <path class="axis" d={`M${at(left)} ${at(y)}H${at(right)}`} />
      <text class="soft middle" x={at((left + right) / 2)} y={at(y + 36)}>
        {label}
      </text>
    </g>
  );
}

export function VerticalAxis({ scale, x, label, ticks, format = tickText, rulesTo }: AxisProps & { x: number }) {
  const [bottom, top] = scale.range() as [number, number];
  return (
    <g>
      {(ticks ?? scale.ticks(5)).map((tick) => (
        <g key={tick}>
          {rulesTo !== undefined && <path class="rule" d={`M${at(x)} ${at(scale(tick))}H${at(rulesTo)}`} />}
          <path class="axis" d={`M${at(x)} ${at(scale(tick))}h-5`} />
          <text class="soft end" x={at(x - 9)} y={at(scale(tick) + 4)}>
            {format(tick)}
          </text>
        </g>
      ))}
      <path class="axis" d={`M${at(x)} ${at(bottom)}V${at(top)}`} />
      <text class="soft" x={at(x - 40)} y={at(Math.min(top, bottom) - 12)}>
        {label}
      </text>
    </g>
  );
}
