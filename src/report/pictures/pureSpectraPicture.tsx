import { scaleLinear } from 'd3-scale';
import { area, line } from 'd3-shape';
import type { PairCalibration } from '../../calibration/calibration.ts';
import { speciesOfPair } from '../../electrolyte/species.ts';
import { absorberName } from '../words.ts';
import { at, HorizontalAxis, VerticalAxis } from './axes.tsx';
import { drawnAs, FillPatterns } from './fillPatterns.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 60;
const RIGHT = 590;
const TOP = 30;

interface PureSpectrum {
  readonly name: string;
  readonly value: readonly number[];
  /** k = 1 */
  readonly uncertainty: readonly number[];
}

/** Molar absorption coefficients of a pair with 95 % bands; what is bound in a complex adds its own panel below. */
export function PureSpectraPicture({ id, pair }: { id: string; pair: PairCalibration }) {
  const spectra = pureSpectra(pair);
  const panels = [spectra.slice(0, 2), ...(spectra.length > 2 ? [spectra.slice(2)] : [])];
  const height = panels.length === 1 ? 250 : 190;
  const nm = Array.from(pair.model.wavelength);
  const x = scaleLinear([nm[0]!, nm.at(-1)!], [LEFT, RIGHT]);
  const bottom = TOP + panels.length * (height + 34) - 34;
  const indices = Array.from(nm.keys());
  const [lower, higher] = speciesOfPair(pair.pair).map(absorberName);
  return (
    <Picture
      id={id}
      question={`How do ${lower} and ${higher} absorb, and how surely is it known?`}
      answer={peaksSentence(spectra, nm)}
      width={WIDTH}
      height={bottom + 44}
      numbers={{
        columns: ['wavelength, nm', ...spectra.flatMap(({ name }) => [absorberName(name), 'u'])],
        rows: indices
          .filter((i) => i % 2 === 0)
          .map((i) => [
            String(nm[i]),
            ...spectra.flatMap(({ value, uncertainty }) => [value[i]!.toPrecision(4), uncertainty[i]!.toPrecision(2)]),
          ]),
      }}
    >
      <FillPatterns id={id} drawn={spectra.map(({ name }, k) => drawnAs(name, k - 2))} />
      {panels.map((panel, p) => {
        const top = TOP + p * (height + 34);
        const y = scaleLinear(
          [
            Math.min(0, ...panel.flatMap(({ value }) => value)),
            1.05 * Math.max(...panel.flatMap(({ value }) => value)),
          ],
          [top + height, top],
        );
        return (
          <g key={p}>
            <VerticalAxis
              scale={y}
              x={LEFT}
              rulesTo={RIGHT}
              label={
                p === 0
                  ? 'molar absorption coefficient, L/(mol·cm)'
                  : 'what binding adds beyond the parts, per mole bound (or per product of the totals)'
              }
            />
            {panel.map(({ name, value, uncertainty }, k) => {
              const drawn = drawnAs(name, p === 0 ? -1 : k);
              const band = area<number>()
                .x((i) => x(nm[i]!))
                .y0((i) => y(value[i]! - 2 * uncertainty[i]!))
                .y1((i) => y(value[i]! + 2 * uncertainty[i]!))
                .digits(1);
              const curve = line<number>()
                .x((i) => x(nm[i]!))
                .y((i) => y(value[i]!))
                .digits(1);
              return (
                <g key={name}>
                  <path class={`tint-${drawn.colour}`} d={band(indices) ?? ''} />
                  <path
                    class={`line-${drawn.colour}`}
                    stroke-width="2.2"
                    stroke-dasharray={drawn.dash}
                    d={curve(indices) ?? ''}
                  />
                </g>
              );
            })}
            {spread(panel.map(({ value }) => y(value.at(-1)!))).map((place, k) => {
              const drawn = drawnAs(panel[k]!.name, p === 0 ? -1 : k);
              return (
                <g key={k}>
                  <path
                    class={`line-${drawn.colour}`}
                    stroke-width="2.2"
                    stroke-dasharray={drawn.dash}
                    d={`M${RIGHT + 4} ${at(place)}h22`}
                  />
                  <text x={RIGHT + 30} y={at(place + 4)}>
                    {shortName(panel[k]!.name)}
                  </text>
                </g>
              );
            })}
          </g>
        );
      })}
      <HorizontalAxis scale={x} y={bottom} label="wavelength, nm" />
    </Picture>
  );
}

const shortName = (name: string): string =>
  (name.includes('·') || name.startsWith('2') ? 'bound ' : '') + symbols(name);
const symbols = (name: string): string =>
  name.startsWith('2') ? `2 ${absorberName(name.slice(1))}` : name.split('·').map(absorberName).join('·');

/** Labels at least a line apart, in their order from the top. */
function spread(places: readonly number[]): number[] {
  const order = [...places.keys()].sort((a, b) => places[a]! - places[b]!);
  const out = [...places];
  order.forEach((k, i) => {
    if (i > 0) out[k] = Math.max(out[k]!, out[order[i - 1]!]! + 16);
  });
  return out;
}

/** u² of a spectrum's value: its variance in the standards' design times the variance of one reading. */
export function pureSpectra({ model }: PairCalibration): PureSpectrum[] {
  const names = [...speciesOfPair(model.pair), ...model.associations.map(({ name }) => name)];
  const reading = model.wavelength.map((_, l) =>
    Math.sqrt(model.noise ** 2 + model.modes.reduce((sum, mode) => sum + mode[l]! ** 2, 0)),
  );
  return names.map((name, k) => ({
    name,
    value: Array.from(model.spectra[k]!),
    uncertainty: Array.from(reading, (u) => u * Math.sqrt(model.designInverse[k * names.length + k]!)),
  }));
}

function peaksSentence(spectra: readonly PureSpectrum[], nm: readonly number[]): string {
  const peaks = spectra.slice(0, 2).map(({ name, value, uncertainty }) => {
    const i = value.indexOf(Math.max(...value));
    return `${absorberName(name)} is strongest at ${nm[i]} nm with ${value[i]!.toPrecision(3)} ± ${uncertainty[i]!.toPrecision(2)} L/(mol·cm)`;
  });
  return `${peaks.join('; ')}. Bands hold 95 %; the axis ends where the calibration does.`;
}
