import { scaleLinear } from 'd3-scale';
import type { PairCalibration } from '../../calibration/calibration.ts';
import { speciesOfPair } from '../../electrolyte/species.ts';
import { absorberName } from '../words.ts';
import { at, HorizontalAxis, VerticalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 60;
const TOP = 30;

/** A left-out standard as drawn: all in per cent of the higher species. */
interface Predicted {
  readonly name: string;
  readonly group: number;
  readonly label: number;
  readonly error: number;
  /** k = 1, the between-group variance included */
  readonly uncertainty: number;
  readonly isInside: boolean;
}

function predictedOf(pair: PairCalibration): { points: Predicted[]; groups: string[] } {
  const groups = [...new Set(pair.leftOut.map(({ group }) => group))];
  return {
    groups,
    points: pair.leftOut.map(({ name, group, share, shareError, shareUncertainty }) => {
      const uncertainty = 100 * Math.hypot(shareUncertainty, pair.betweenGroup.share);
      return {
        name,
        group: groups.indexOf(group),
        label: 100 * share,
        error: 100 * shareError,
        uncertainty,
        isInside: Math.abs(100 * shareError) <= 1.96 * uncertainty,
      };
    }),
  };
}

/** Found against labelled share for standards left out with their group. */
export function PredictedPicture({ id, pair }: { id: string; pair: PairCalibration }) {
  const { points, groups } = predictedOf(pair);
  if (points.length === 0) return null;
  const end = 390;
  const right = 440;
  const x = scaleLinear([-4, 104], [LEFT, right]);
  const y = scaleLinear([-4, 104], [end, TOP]);
  const higher = absorberName(speciesOfPair(pair.pair)[1]);
  const inside = points.filter((point) => point.isInside).length;
  const all = pair.validation.find(({ group }) => group === 'all')!;
  return (
    <Picture
      id={id}
      question="Does it get standards right that it has not seen?"
      answer={`Standards left out with their whole group and then assayed: ${(100 * all.share.rmse).toFixed(2)} points of ${higher} off on average (root mean square), ${(100 * all.share.largest).toFixed(1)} at most; ${inside} of ${points.length} labels lie inside their 95 % interval.`}
      width={WIDTH}
      height={end + 50}
      numbers={{
        columns: ['standard', `label, % ${higher}`, 'found − label, points', 'u, points'],
        rows: points.map(({ name, label, error, uncertainty }) => [
          name,
          label.toFixed(1),
          error.toFixed(2),
          uncertainty.toFixed(2),
        ]),
      }}
    >
      <VerticalAxis scale={y} x={LEFT} label={`found, % ${higher}`} rulesTo={right} />
      <path class="axis" d={`M${at(x(0))} ${at(y(0))}L${at(x(100))} ${at(y(100))}`} />
      {points.map((point) => (
        <g key={point.name}>
          <path
            class="ink-line"
            d={`M${at(x(point.label))} ${at(y(point.label + point.error - 2 * point.uncertainty))}V${at(y(point.label + point.error + 2 * point.uncertainty))}`}
          />
          <GroupMark group={point.group} x={x(point.label)} y={y(point.label + point.error)} />
        </g>
      ))}
      <HorizontalAxis scale={x} y={end} label={`label, % ${higher}`} ticks={[0, 20, 40, 60, 80, 100]} rulesTo={TOP} />
      <Key groups={groups} x={right + 40} y={TOP + 20} />
    </Picture>
  );
}

/** Error of left-out standards along the composition. */
export function ErrorPicture({ id, pair }: { id: string; pair: PairCalibration }) {
  const { points, groups } = predictedOf(pair);
  if (points.length === 0) return null;
  const right = 600;
  const end = 260;
  const x = scaleLinear([-4, 104], [LEFT, right]);
  const reach = 1.1 * Math.max(...points.map(({ error, uncertainty }) => Math.abs(error) + 2 * uncertainty));
  const y = scaleLinear([-reach, reach], [end, TOP]);
  const higher = absorberName(speciesOfPair(pair.pair)[1]);
  const outside = points.filter((point) => !point.isInside);
  return (
    <Picture
      id={id}
      question="Where along the charge is it off?"
      answer={
        outside.length === 0
          ? 'Nowhere beyond its own 95 % intervals.'
          : `${outside.length} of ${points.length} standards miss by more than their 95 % interval (ringed): ${outside.map(({ name, error }) => `${name} by ${error.toFixed(1)}`).join(', ')} points.`
      }
      width={WIDTH}
      height={end + 50}
      numbers={{
        columns: ['standard', 'group', `label, % ${higher}`, 'found − label, points', '95 % interval, ± points'],
        rows: points.map(({ name, group, label, error, uncertainty }) => [
          name,
          groups[group]!,
          label.toFixed(1),
          error.toFixed(2),
          (1.96 * uncertainty).toFixed(2),
        ]),
      }}
    >
      <VerticalAxis scale={y} x={LEFT} label="found − label, points" rulesTo={right} />
      <path class="axis" d={`M${LEFT} ${at(y(0))}H${right}`} />
      {points.map((point) => {
        const left = x(point.label) + 4 * (point.group - (groups.length - 1) / 2);
        return (
          <g key={point.name}>
            <path
              class="ink-line"
              d={`M${at(left)} ${at(y(point.error - 2 * point.uncertainty))}V${at(y(point.error + 2 * point.uncertainty))}`}
            />
            <GroupMark group={point.group} x={left} y={y(point.error)} />
            {!point.isInside && (
              <circle class="ink-line" stroke-width="1.6" cx={at(left)} cy={at(y(point.error))} r="8" />
            )}
          </g>
        );
      })}
      <HorizontalAxis scale={x} y={end} label={`label, % ${higher}`} ticks={[0, 20, 40, 60, 80, 100]} />
      <Key groups={groups} x={right + 18} y={TOP + 20} />
    </Picture>
  );
}

const SHAPES = [
  'M-3.6 0a3.6 3.6 0 1 0 7.2 0a3.6 3.6 0 1 0 -7.2 0z',
  'M-3.4 -3.4h6.8v6.8h-6.8z',
  'M0 -4.4l4.2 7.6h-8.4z',
  'M0 -4.8l4.8 4.8l-4.8 4.8l-4.8 -4.8z',
];

/** Groups differ by shape, and further ones by being hollow. */
function GroupMark({ group, x, y }: { group: number; x: number; y: number }) {
  const hollow = Math.floor(group / SHAPES.length) % 2 === 1;
  return (
    <path
      class={hollow ? 'ink-line raised-fill' : 'accent-fill'}
      stroke-width="1.4"
      d={SHAPES[group % SHAPES.length]}
      transform={`translate(${at(x)} ${at(y)})`}
    />
  );
}

function Key({ groups, x, y }: { groups: readonly string[]; x: number; y: number }) {
  return (
    <g>
      <text class="soft" x={x - 8} y={y - 8}>
        left out together
      </text>
      {groups.slice(0, 12).map((group, i) => (
        <g key={group}>
          <GroupMark group={i} x={x} y={y + 14 + 20 * i} />
          <text x={x + 12} y={y + 18 + 20 * i}>
            {group.length > 20 ? `${group.slice(0, 19)}…` : group}
          </text>
        </g>
      ))}
    </g>
  );
}
