import { scaleLinear } from 'd3-scale';
import { area, line, stack } from 'd3-shape';
import type { AssayResult, FitRecord } from '../../assay/result.ts';
import { absorberName, pathText } from '../words.ts';
import { at, HorizontalAxis, VerticalAxis, type Scale } from './axes.tsx';
import { drawnAs, FillPatterns } from './fillPatterns.tsx';
import { Picture } from './picture.tsx';

type Curve = NonNullable<FitRecord['curve']>;

const WIDTH = 760;
const LEFT = 52;
const RIGHT = 742;
const TOP = 26;
const CURVES_END = 270;
const RESIDUAL_TOP = 306;
const RESIDUAL_END = 386;
/** All of them lie in the record; a table of every reading would be most of the file */
const MOST_ROWS = 40;
const LABEL_ROOM = 55;
const MOST_MARKS = 60;

/** Measured and fitted spectrum with each absorber's share, and below it the residual in units of its own uncertainty. */
export function SpectrumPicture({ id, assay }: { id: string; assay: AssayResult }) {
  const { fit } = assay;
  if (!fit?.curve) return null;
  const { curve } = fit;
  const runs = unbrokenRuns(curve.wavelength);
  const names = Object.keys(curve.shares);
  const complexes = names.filter((name) => !/^V[2-5]$/.test(name));
  const drawn = names.map((name) => drawnAs(name, complexes.indexOf(name)));
  const residuals = scaledResiduals(curve);
  const x = scaleLinear([curve.wavelength[0]!, curve.wavelength.at(-1)!], [LEFT, RIGHT]);
  const highest = Math.max(0.05, ...curve.fitted, ...curve.measured.map((value) => value ?? 0));
  const lowest = Math.min(0, ...curve.measured.map((value) => value ?? 0), ...curve.fitted);
  const y = scaleLinear([lowest, highest * 1.04], [CURVES_END, TOP]);
  const reach = Math.max(3, ...residuals.map((value) => Math.abs(value ?? 0))) * 1.05;
  const r = scaleLinear([-reach, reach], [RESIDUAL_END, RESIDUAL_TOP]);
  const layers = stack<number, string>()
    .keys(names)
    .value((i, name) => curve.shares[name]![i]!)(Array.from(curve.wavelength.keys()));
  return (
    <Picture
      id={id}
      question="Does the fit explain what the cuvette showed?"
      answer={fitSentence(assay, residuals)}
      width={WIDTH}
      height={430}
      numbers={{
        columns: ['wavelength, nm', 'measured', 'fitted', ...names.map(absorberName), 'residual, in its uncertainty'],
        rows: everyFew(curve.wavelength, MOST_ROWS).map((i) => [
          String(curve.wavelength[i]),
          curve.measured[i]?.toFixed(4) ?? '–',
          curve.fitted[i]!.toFixed(4),
          ...names.map((name) => curve.shares[name]![i]!.toFixed(4)),
          residuals[i]?.toFixed(1) ?? '–',
        ]),
      }}
    >
      <FillPatterns id={id} drawn={drawn} />
      <Unused id={id} runs={runs} wavelength={curve.wavelength} x={x} />
      <VerticalAxis scale={y} x={LEFT} label={`absorbance in ${pathText(assay.pathLength)}`} rulesTo={RIGHT} />
      {layers.map((layer, k) => (
        <g key={layer.key}>
          {runs.map((run) => (
            <path
              key={run[0]}
              fill={`url(#${id}-${drawn[k]!.colour})`}
              class={`edge-${drawn[k]!.colour}`}
              stroke-width="0.8"
              d={
                area<number>()
                  .x((i) => x(curve.wavelength[i]!))
                  .y0((i) => y(layer[i]![0]))
                  .y1((i) => y(layer[i]![1]))
                  .digits(1)(run) ?? ''
              }
            />
          ))}
        </g>
      ))}
      {runs.map((run) => (
        <path
          key={run[0]}
          class="ink-line"
          stroke-width="1.6"
          d={
            line<number>()
              .x((i) => x(curve.wavelength[i]!))
              .y((i) => y(curve.fitted[i]!))
              .digits(1)(run) ?? ''
          }
        />
      ))}
      <g class="ink-line raised-fill" stroke-width="1">
        {everyFew(curve.wavelength, MOST_MARKS).map((i) =>
          curve.measured[i] === null ? null : (
            <circle key={i} cx={at(x(curve.wavelength[i]!))} cy={at(y(curve.measured[i]!))} r="2.3" />
          ),
        )}
      </g>
      {labelPlaces(layers, y, x, curve.wavelength).map(({ name, left, top }) => (
        <text key={name} class="halo middle" x={at(left)} y={at(top)}>
          {absorberName(name)}
        </text>
      ))}
      <text class="soft end" x={RIGHT} y={TOP - 10}>
        ○ measured — fitted
      </text>
      <rect class="band" x={LEFT} y={at(r(2))} width={RIGHT - LEFT} height={at(r(-2) - r(2))} />
      <VerticalAxis
        scale={r}
        x={LEFT}
        label="measured − fitted, in units of its uncertainty (grey: ±2)"
        ticks={residualTicks(reach)}
      />
      <path class="axis" d={`M${LEFT} ${at(r(0))}H${RIGHT}`} />
      {runs.map((run) => (
        <path
          key={run[0]}
          class="ink-line"
          stroke-width="1.2"
          d={
            line<number>()
              .defined((i) => residuals[i] !== null)
              .x((i) => x(curve.wavelength[i]!))
              .y((i) => r(residuals[i]!))
              .digits(1)(run) ?? ''
          }
        />
      ))}
      <HorizontalAxis scale={x} y={RESIDUAL_END} label="wavelength, nm" />
    </Picture>
  );
}

const residualTicks = (reach: number): number[] => {
  const step = reach < 4 ? 2 : Math.ceil(reach / 3);
  return [-step, 0, step];
};

/** Measured − fitted over its standard uncertainty; null where nothing was measured. */
export function scaledResiduals({ measured, fitted, residualUncertainty }: Curve): (number | null)[] {
  return measured.map((value, i) => (value === null ? null : (value - fitted[i]!) / residualUncertainty[i]!));
}

/** Parts of the wavelengths that may lie beyond two uncertainties before the fit is called poor: one in twenty does so by chance. */
const FAR_DOUBTFUL = 0.1;
const FAR_POOR = 0.33;

function fitSentence({ findings, fit }: AssayResult, residuals: readonly (number | null)[]): string {
  const far = residuals.filter((value) => value !== null && Math.abs(value) > 2).length;
  const severity = findings.find(({ code }) => code === 'poor-match')?.severity;
  const share = far / residuals.length;
  const verdict =
    severity === 'withhold' || share > FAR_POOR ? 'No' : severity || share > FAR_DOUBTFUL ? 'Not fully' : 'Yes';
  return `${verdict}: ${far} of ${residuals.length} wavelengths miss by more than twice their uncertainty; ${fit!.residualRms.toPrecision(2)} of absorbance is left on average (root mean square).`;
}

/** Indices of wavelengths that follow each other without a gap. */
export function unbrokenRuns(wavelength: readonly number[]): number[][] {
  const steps = wavelength.slice(1).map((nm, i) => nm - wavelength[i]!);
  const usual = [...steps].sort((a, b) => a - b)[Math.floor(steps.length / 2)] ?? 1;
  const runs: number[][] = [[0]];
  steps.forEach((step, i) => {
    if (step > 1.6 * usual) runs.push([]);
    runs.at(-1)!.push(i + 1);
  });
  return runs;
}

interface UnusedProps {
  readonly id: string;
  readonly runs: readonly (readonly number[])[];
  readonly wavelength: readonly number[];
  readonly x: Scale;
}

function Unused({ id, runs, wavelength, x }: UnusedProps) {
  const gaps = runs.slice(1).map((run, k) => [wavelength[runs[k]!.at(-1)!]!, wavelength[run[0]!]!] as const);
  return (
    <g>
      {gaps.map(([from, to]) => (
        <g key={from}>
          <rect
            x={at(x(from))}
            width={at(x(to) - x(from))}
            y={TOP}
            height={RESIDUAL_END - TOP}
            fill={`url(#${id}-unused)`}
          />
          <text class="soft middle halo" x={at(x((from + to) / 2))} y={TOP + 12}>
            not used
          </text>
        </g>
      ))}
    </g>
  );
}

/** Rows of a table or marks of a drawing: all of them up to `most`, else every n-th. */
function everyFew(wavelength: readonly number[], most: number): number[] {
  const every = Math.ceil(wavelength.length / most);
  return [...wavelength.keys()].filter((i) => i % every === 0);
}

/** A label in the middle of each layer where it is thickest, if it is thick enough to be seen at all. */
function labelPlaces(
  layers: readonly (readonly (readonly [number, number] | readonly number[])[] & { key: string })[],
  y: Scale,
  x: Scale,
  wavelength: readonly number[],
): { name: string; left: number; top: number }[] {
  const ends = unbrokenRuns(wavelength).flatMap((run) => [x(wavelength[run[0]!]!), x(wavelength[run.at(-1)!]!)]);
  const hasRoom = (i: number): boolean => ends.every((end) => Math.abs(x(wavelength[i]!) - end) > LABEL_ROOM);
  return layers.flatMap((layer) => {
    const thickness = layer.map((pair, i) => (hasRoom(i) ? Math.abs(y(pair[1]!) - y(pair[0]!)) : 0));
    const i = thickness.indexOf(Math.max(...thickness));
    if (thickness[i]! < 9) return [];
    return [{ name: layer.key, left: x(wavelength[i]!), top: (y(layer[i]![0]!) + y(layer[i]![1]!)) / 2 + 4 }];
  });
}
