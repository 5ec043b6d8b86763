// What        Noise, drift and flatness from repeated blanks, and how noise grows with absorbance from repeated scans of a dark sample.
// Equation    difference of neighbouring scans, freed of offset, slope and bend: its variance/2 is σ²(A) = σ₀² + σ₁² 10^A;
//             drift: line through the scans' means against time; flatness: largest |running mean over 10 nm| of the mean blank
//             about its own mean.
// Why so      what both scans share (sample, structure of the baseline) cancels in the difference, so any clear sample will do.
// Valid for   two blanks for noise, three with times for drift. Noise of the two kinds is told apart only with scans of A > 0.7.
// Units       absorbance; drift A/h; slope A per 100 nm.
// Source      ours; limits: common practice, no source.
import type { InstrumentRecord, InstrumentTest } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { chiSquareQuantile } from '../../numerics/distributions.ts';
import { mean, standardDeviation } from '../../numerics/meanAndDeviation.ts';
import { fitLinear } from '../../numerics/linearFit.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';
import type { BlankScan, RepeatScan } from './scans.ts';
import { judged, type TestOutcome } from './testOutcome.ts';

/** Permitted, absorbance and absorbance per hour [common practice, no source]. */
export interface BaselineLimits {
  readonly noise: number;
  readonly drift: number;
  readonly flatness: number;
}

export const DEFAULT_BASELINE_LIMITS: BaselineLimits = { noise: 0.001, drift: 0.002, flatness: 0.002 };

export interface BaselineStability {
  readonly noise: InstrumentRecord['noise'];
  readonly offsetPrior: number | null;
  readonly slopePrior: number | null;
}

const FLATNESS_WINDOW = 10;
const sourceOf = (limit: number, usual: number): string =>
  limit === usual ? 'common practice, no source' : 'as asked';

export function baselineStability(
  blanks: readonly BlankScan[],
  repeats: readonly RepeatScan[],
  limits: BaselineLimits = DEFAULT_BASELINE_LIMITS,
): TestOutcome<BaselineStability> {
  const groups = [blanks, ...groupsByName(repeats)].filter((group) => group.length >= 2);
  const pieces = groups.flatMap((group) => noisePieces(group.map(({ spectrum }) => spectrum)));
  const noise = pieces.length > 0 ? { ...noiseLaw(pieces), step: stepOf(groups[0]![0]!.spectrum) } : null;
  const shapes = blanks.map(({ spectrum }) => baselineOfScan(spectrum));
  const enough = shapes.length >= 3;
  return {
    property: {
      noise,
      offsetPrior: enough ? standardDeviation(shapes.map(({ offset }) => offset)) : null,
      slopePrior: enough ? standardDeviation(shapes.map(({ slope }) => slope)) : null,
    },
    tests: [
      ...(blanks.length >= 2 ? [noiseTest(blanks, limits.noise)] : []),
      ...driftTest(blanks, shapes, limits.drift),
      ...(blanks.length >= 1 ? [flatnessTest(blanks, limits.flatness)] : []),
    ],
    findings: enough || blanks.length === 0 ? [] : [fewBlanks(blanks.length)],
  };
}

function groupsByName(repeats: readonly RepeatScan[]): RepeatScan[][] {
  const names = [...new Set(repeats.map(({ name }) => name))];
  return names.map((name) => repeats.filter((repeat) => repeat.name === name));
}

/** Mean square of one bin of points, a standard deviation's worth of information with it. */
interface NoisePiece {
  /** mean of 10^A over the bin */
  readonly brightness: number;
  readonly variance: number;
  readonly degreesOfFreedom: number;
}

const BIN = 20;

function noisePieces(spectra: readonly Spectrum[]): NoisePiece[] {
  return spectra.slice(1).flatMap((later, j) => {
    const earlier = spectra[j]!;
    const common = commonPoints(earlier, later);
    if (common.wavelength.length < BIN) return [];
    const residual = withoutBend(common.wavelength, common.difference);
    const pieces: NoisePiece[] = [];
    for (let start = 0; start + BIN <= residual.length; start += BIN) {
      let square = 0;
      let brightness = 0;
      for (let i = start; i < start + BIN; i++) {
        square += residual[i]! ** 2;
        brightness += 10 ** common.absorbance[i]!;
      }
      pieces.push({ brightness: brightness / BIN, variance: square / (2 * BIN), degreesOfFreedom: BIN });
    }
    return pieces;
  });
}

/** nm from point to point, over the whole scan. */
const stepOf = ({ wavelength }: Spectrum): number =>
  (wavelength[wavelength.length - 1]! - wavelength[0]!) / (wavelength.length - 1);

/** Points at the same wavelengths, with the difference of two scans and their mean. */
function commonPoints(earlier: Spectrum, later: Spectrum) {
  const at = new Map([...earlier.wavelength].map((nm, i) => [nm, earlier.absorbance[i]!]));
  const points = [...later.wavelength].flatMap((nm, i) => {
    const difference = later.absorbance[i]! - (at.get(nm) ?? NaN);
    return Number.isFinite(difference) ? [{ nm, difference, absorbance: later.absorbance[i]! - difference / 2 }] : [];
  });
  return {
    wavelength: Float64Array.from(points, ({ nm }) => nm),
    difference: Float64Array.from(points, ({ difference }) => difference),
    absorbance: Float64Array.from(points, ({ absorbance }) => absorbance),
  };
}

function withoutBend(wavelength: Float64Array, values: Float64Array): Float64Array {
  const middle = (wavelength[0]! + wavelength[wavelength.length - 1]!) / 2;
  const x = wavelength.map((nm) => (nm - middle) / 100);
  const fit = fitLinear([x.map(() => 1), x, x.map((v) => v * v)], values);
  const [c0, c1, c2] = fit.coefficients as unknown as [number, number, number];
  return values.map((value, i) => value - c0 - c1 * x[i]! - c2 * x[i]! ** 2);
}

/**
 * σ₀² and σ₁² by weighted least squares on variances (each weighted by the inverse square of its expected size, taken from a
 * first pass); a negative one is left out and the other fitted alone.
 */
function noiseLaw(pieces: readonly NoisePiece[]): { constant: number; shot: number | null } {
  const brightest = Math.max(...pieces.map(({ brightness }) => brightness));
  const constantOnly = Math.sqrt(weightedMean(pieces.map((p) => [p.variance, p.degreesOfFreedom])));
  // Below A = 0.7 the two laws look alike.
  if (brightest < 5) return { constant: constantOnly, shot: null };
  let expected = pieces.map(() => 1);
  let law: readonly [number, number] = [0, 0];
  for (let pass = 0; pass < 5; pass++) {
    const weight = Float64Array.from(pieces, (p, i) => Math.sqrt(p.degreesOfFreedom) / expected[i]!);
    const fit = fitLinear(
      [weight, weight.map((w, i) => w * pieces[i]!.brightness)],
      weight.map((w, i) => w * pieces[i]!.variance),
    );
    law = [fit.coefficients[0]!, fit.coefficients[1]!];
    if (law[0] < 0) law = [0, weightedMean(pieces.map((p) => [p.variance / p.brightness, p.degreesOfFreedom]))];
    if (law[1] < 0) law = [weightedMean(pieces.map((p) => [p.variance, p.degreesOfFreedom])), 0];
    expected = pieces.map((p) => law[0] + law[1] * p.brightness);
  }
  return { constant: Math.sqrt(law[0]), shot: Math.sqrt(law[1]) };
}

function weightedMean(pairs: readonly (readonly [number, number])[]): number {
  const total = pairs.reduce((sum, [, weight]) => sum + weight, 0);
  return pairs.reduce((sum, [value, weight]) => sum + value * weight, 0) / total;
}

/** Mean and slope of one blank. */
function baselineOfScan({ wavelength, absorbance }: Spectrum): {
  offset: number;
  offsetUncertainty: number;
  slope: number;
} {
  const kept = [...wavelength.keys()].filter((i) => Number.isFinite(absorbance[i]));
  const middle = (wavelength[0]! + wavelength[wavelength.length - 1]!) / 2;
  const x = Float64Array.from(kept, (i) => (wavelength[i]! - middle) / 100);
  const fit = fitLinear(
    [x.map(() => 1), x],
    Float64Array.from(kept, (i) => absorbance[i]!),
  );
  return { offset: fit.coefficients[0]!, offsetUncertainty: fit.standardErrors[0]!, slope: fit.coefficients[1]! };
}

function noiseTest(blanks: readonly BlankScan[], limit: number): InstrumentTest {
  const pieces = noisePieces(blanks.map(({ spectrum }) => spectrum));
  const value = Math.sqrt(weightedMean(pieces.map((p) => [p.variance, p.degreesOfFreedom])));
  const freedom = pieces.reduce((sum, p) => sum + p.degreesOfFreedom, 0);
  return judged(
    {
      test: 'blank',
      property: 'noise of one point',
      unit: 'A',
      value,
      // Half the 95 % interval of a standard deviation, as a standard uncertainty.
      uncertainty: (value * (Math.sqrt(freedom / chiSquareQuantile(0.025, freedom)) - 1)) / 1.96,
      limitSource: sourceOf(limit, DEFAULT_BASELINE_LIMITS.noise),
    },
    [0, limit],
  );
}

function driftTest(
  blanks: readonly BlankScan[],
  shapes: readonly { offset: number }[],
  limit: number,
): InstrumentTest[] {
  const timed = blanks.flatMap(({ minutes }, i) =>
    Number.isNaN(minutes) ? [] : [{ minutes, offset: shapes[i]!.offset }],
  );
  if (new Set(timed.map(({ minutes }) => minutes)).size < 3) return [];
  const middle = mean(timed.map(({ minutes }) => minutes));
  const hours = Float64Array.from(timed, ({ minutes }) => (minutes - middle) / 60);
  const fit = fitLinear(
    [hours.map(() => 1), hours],
    Float64Array.from(timed, ({ offset }) => offset),
  );
  return [
    judged(
      {
        test: 'blank',
        property: 'drift',
        unit: 'A/h',
        value: fit.coefficients[1]!,
        uncertainty: fit.standardErrors[1]!,
        limitSource: sourceOf(limit, DEFAULT_BASELINE_LIMITS.drift),
      },
      [-limit, limit],
    ),
  ];
}

function flatnessTest(blanks: readonly BlankScan[], limit: number): InstrumentTest {
  const { wavelength } = blanks[0]!.spectrum;
  const sums = new Map<number, { sum: number; count: number }>();
  for (const { spectrum } of blanks)
    spectrum.wavelength.forEach((nm, i) => {
      const value = spectrum.absorbance[i]!;
      if (!Number.isFinite(value)) return;
      const entry = sums.get(nm) ?? { sum: 0, count: 0 };
      sums.set(nm, { sum: entry.sum + value, count: entry.count + 1 });
    });
  const points = [...wavelength].flatMap((nm) => {
    const entry = sums.get(nm);
    return entry ? [{ nm, value: entry.sum / entry.count }] : [];
  });
  const level = mean(points.map(({ value }) => value));
  let largest = 0;
  let uncertainty = 0;
  let first = 0;
  let end = 0;
  points.forEach(({ nm }) => {
    while (nm - points[first]!.nm > FLATNESS_WINDOW / 2) first += 1;
    while (end < points.length && points[end]!.nm - nm <= FLATNESS_WINDOW / 2) end += 1;
    const near = points.slice(first, end).map(({ value }) => value);
    const departure = mean(near) - level;
    if (Math.abs(departure) <= Math.abs(largest)) return;
    largest = departure;
    uncertainty = (near.length > 2 ? standardDeviation(near) : Math.abs(departure)) / Math.sqrt(near.length);
  });
  return judged(
    {
      test: 'blank',
      property: 'flatness, largest departure over 10 nm',
      unit: 'A',
      value: largest,
      uncertainty,
      limitSource: sourceOf(limit, DEFAULT_BASELINE_LIMITS.flatness),
    },
    [-limit, limit],
  );
}

const fewBlanks = (count: number): Finding => ({
  code: 'blanks-few',
  severity: 'note',
  message: `expected 3 blanks or more to learn how offset and slope vary; received ${count}: later assays keep the usual priors`,
  hint: 'take the cell out, put it back and scan the blank again, three to ten times, and write the minutes',
});
