import { scaleLinear } from 'd3-scale';
import type { Calibration } from '../../calibration/calibration.ts';
import { at, HorizontalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 260;
const RIGHT = 700;
const TOP = 30;
const ROW = 22;
const MOST = 12;
const DOUBT = 3;

/** The standards that the others contradict most. */
export function StandardsPicture({ id, calibration }: { id: string; calibration: Calibration }) {
  const { standards } = calibration;
  if (standards.length === 0) return null;
  const worst = [...standards]
    .sort((a, b) => Math.abs(b.shareDoubtInUncertainty) - Math.abs(a.shareDoubtInUncertainty))
    .slice(0, MOST);
  const doubted = standards.filter(({ doubt }) => doubt !== null);
  const reach = Math.max(DOUBT + 1, ...worst.map((one) => Math.abs(one.shareDoubtInUncertainty)));
  const x = scaleLinear([-reach, reach], [LEFT, RIGHT]);
  const end = TOP + worst.length * ROW + 8;
  return (
    <Picture
      id={id}
      question="Which standard should be made again?"
      answer={
        doubted.length === 0
          ? `None of ${standards.length} is in doubt; drawn are the ${worst.length} that the others contradict most.`
          : `${doubted.map(({ name, doubt }) => `${name}: ${doubt}`).join('; ')}. Drawn are the ${worst.length} of ${standards.length} that the others contradict most.`
      }
      width={WIDTH}
      height={end + 44}
      numbers={{
        columns: ['standard', 'pair', 'moves by, points', 'in its uncertainty', 'leverage', 'path off by, %'],
        rows: worst.map((one) => [
          one.name,
          one.pair,
          (100 * one.shareDoubt).toFixed(2),
          one.shareDoubtInUncertainty.toFixed(1),
          one.leverage.toFixed(2),
          (100 * one.pathMoved).toFixed(1),
        ]),
      }}
    >
      <rect class="band" x={at(x(-DOUBT))} y={TOP - 8} width={at(x(DOUBT) - x(-DOUBT))} height={end - TOP + 8} />
      <text class="soft middle" x={at(x(0))} y={TOP - 12}>
        inside ±{DOUBT}: ordinary
      </text>
      <path class="axis" d={`M${at(x(0))} ${TOP - 8}V${end}`} />
      {worst.map((one, i) => {
        const y = TOP + i * ROW + 8;
        const to = x(one.shareDoubtInUncertainty);
        return (
          <g key={one.name}>
            <text class={one.doubt === null ? 'end' : 'end strong'} x={LEFT - 12} y={y + 4}>
              {`${one.doubt === null ? '' : 'in doubt: '}${one.name.length > 30 ? `${one.name.slice(0, 29)}…` : one.name}`}
            </text>
            <path class="ink-line" stroke-width="1.6" d={`M${at(x(0))} ${y}H${at(to)}`} />
            <circle
              class={one.doubt === null ? 'ink-line raised-fill' : 'ink-fill'}
              stroke-width="1.6"
              cx={at(to)}
              cy={y}
              r="4.5"
            />
          </g>
        );
      })}
      <HorizontalAxis scale={x} y={end} label="how far the others would move its label, in units of its uncertainty" />
    </Picture>
  );
}
