import { scaleLog } from 'd3-scale';
import type { Calibration } from '../../calibration/calibration.ts';
import { absorberName, pathText } from '../words.ts';
import { at, HorizontalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 220;
const RIGHT = 700;
const TOP = 34;
const ROW = 30;

/** Decision, detection and quantification limits of each species beside its neighbour. */
export function LimitsPicture({ id, calibration }: { id: string; calibration: Calibration }) {
  const rows = calibration.pairs.flatMap(({ pair, limits }) =>
    limits.map((limit) => ({
      ...limit,
      key: `${pair}:${limit.species}`,
      name: `${absorberName(limit.species)} beside ${absorberName(pair.split('/').find((one) => one !== limit.species)!)}`,
    })),
  );
  if (rows.length === 0) return null;
  const values = rows
    .flatMap(({ decision, quantification }) => [decision, quantification])
    .filter((value) => value > 0);
  const x = scaleLog([Math.min(...values) / 1.5, Math.max(...values) * 1.5], [LEFT, RIGHT]);
  const end = TOP + rows.length * ROW;
  const faintest = rows.reduce((a, b) => (b.detection > a.detection ? b : a));
  return (
    <Picture
      id={id}
      question="How little of each state would be seen?"
      answer={`All states are seen from ${faintest.detection.toPrecision(2)} mol/L on, ${faintest.name} being the hardest. Detection and decision after ISO 11843-2; limits for the paths of the standards.`}
      width={WIDTH}
      height={end + 48}
      numbers={{
        columns: ['state', 'path', 'decision, mol/L', 'detection', 'quantification', 'selectivity'],
        rows: rows.map((row) => [
          row.name,
          pathText(row.path),
          row.decision.toPrecision(2),
          row.detection.toPrecision(2),
          row.quantification.toPrecision(2),
          row.selectivity.toFixed(2),
        ]),
      }}
    >
      <text class="soft" x={LEFT} y={TOP - 16}>
        ◇ told from nothing ● detected for sure ■ known to a third
      </text>
      {rows.map((row, i) => {
        const y = TOP + i * ROW + 10;
        return (
          <g key={row.key}>
            <text class="end" x={LEFT - 14} y={y + 4}>
              {row.name}
            </text>
            <path class="ink-line" d={`M${at(x(row.decision))} ${y}H${at(x(row.quantification))}`} />
            <path class="ink-line raised-fill" d={`M${at(x(row.decision))} ${y - 5}l5 5l-5 5l-5 -5z`} />
            <circle class="ink-fill" cx={at(x(row.detection))} cy={y} r="4.6" />
            <rect class="ink-fill" x={at(x(row.quantification) - 4)} y={y - 4} width="8" height="8" />
          </g>
        );
      })}
      <HorizontalAxis
        scale={x}
        y={end}
        label="concentration of the cuvette, mol/L"
        ticks={[0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5].filter(
          (tick) => tick >= x.domain()[0]! && tick <= x.domain()[1]!,
        )}
        rulesTo={TOP}
      />
    </Picture>
  );
}
