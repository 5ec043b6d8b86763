// What        Path of an empty cell from the interference fringes between its inner faces.
// Equation    absorbance = smooth + a cos(2πfσ) + b sin(2πfσ), σ = 1/λ, f = 2nℓ. With N fringes between λ₁ and λ₂ this is
//             ℓ = N / (2n (1/λ₁ − 1/λ₂)).
// Why so      a fit of all points finds f more closely than counting maxima, and says how closely. N and the λ of the first and the last
//             fringe are returned as well, so that a person can count them on paper.
// Valid for   plane, parallel inner faces; fringes wider than two points and than the bandwidth: about 0.2 mm at 0.2 nm pitch and
//             bandwidth, 0.05 mm at 1 nm. n = 1 for an empty cell (air: 1.0003).
// Units       wavelength nm, path cm, σ in cm⁻¹.
// Source      any text on infrared or thin cells; fit and detection limit ours.
import { TankhueError } from '../../errors.ts';
import { fitLinear, type LinearFit } from '../../numerics/linearFit.ts';
import { fSurvival } from '../../numerics/distributions.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';

export interface FringeOptions {
  /** of what fills the cell: 1 for air */
  readonly refractiveIndex: number;
  /** cm; the search runs from half to one and a half of it. 0 = unknown, everything the points resolve is searched */
  readonly nominalPath: number;
  /** standard uncertainty of the wavelength axis, nm */
  readonly wavelengthUncertainty: number;
}

export interface FringePath {
  /** cm */
  readonly pathLength: number;
  readonly uncertainty: number;
  /** whole fringes between the two wavelengths, nm */
  readonly fringes: number;
  readonly between: readonly [number, number];
  /** absorbance */
  readonly amplitude: number;
  /** that so strong a fringe comes from noise alone, all searched paths counted */
  readonly chance: number;
}

/** A fringe this likely to be noise is not believed. */
export const FRINGE_CHANCE_LIMIT = 1e-4;

const SMOOTH_TERMS = 5;

/**
 * @returns null when no fringe stands out of the noise
 * @throws TankhueError `points-missing`, `fringes-too-fine`
 */
export function pathFromFringes(spectrum: Spectrum, options: FringeOptions): FringePath | null {
  const kept = [...spectrum.wavelength.keys()].filter((i) => Number.isFinite(spectrum.absorbance[i]));
  if (kept.length < 30)
    throw new TankhueError(
      'points-missing',
      `expected 30 points or more to find fringes; received ${kept.length}`,
      `spectrum ${spectrum.name}`,
      'scan the empty cell over a few hundred nm with the finest step',
    );
  const wavenumber = Float64Array.from(kept, (i) => 1e7 / spectrum.wavelength[i]!);
  const absorbance = Float64Array.from(kept, (i) => spectrum.absorbance[i]!);
  const high = wavenumber[0]!;
  const low = wavenumber[wavenumber.length - 1]!;
  const smooth = smoothTerms(wavenumber, low, high);
  const plain = fitLinear(smooth, absorbance);

  const finest = finestFrequency(wavenumber);
  const nominal = 2 * options.refractiveIndex * options.nominalPath;
  if (nominal > finest)
    throw new TankhueError(
      'fringes-too-fine',
      `expected fringes wider than two points, that is a path below ${(finest * 5) / options.refractiveIndex} mm at this step; received ${options.nominalPath * 10} mm`,
      `spectrum ${spectrum.name}`,
      'scan with a finer step, or measure the path with a filled cell',
    );
  const resolution = 1 / (high - low);
  const from = nominal > 0 ? nominal / 2 : 3 * resolution;
  const to = nominal > 0 ? Math.min(finest, nominal * 1.5) : finest;
  const residual = residualOf(plain, smooth, absorbance);
  let best = from;
  let bestPower = -1;
  for (let frequency = from; frequency <= to; frequency += resolution / 5) {
    const power = powerAt(wavenumber, residual, frequency);
    if (power > bestPower) [best, bestPower] = [frequency, power];
  }
  const { frequency, frequencyUncertainty, fit, amplitude } = refine(wavenumber, absorbance, smooth, best, resolution);

  const freedom = fit.degreesOfFreedom;
  const ratio = (plain.residualSumOfSquares - fit.residualSumOfSquares) / 3 / (fit.residualSumOfSquares / freedom);
  const trials = Math.max(1, (to - from) / resolution);
  const chance = Math.min(1, trials * fSurvival(ratio, 3, freedom));
  if (!(chance < FRINGE_CHANCE_LIMIT)) return null;

  const pathLength = frequency / (2 * options.refractiveIndex);
  // An axis that reads δ too long stretches 1/λ₁ − 1/λ₂ by (σ₁ + σ₂)δ.
  const stretch = (high + low) * options.wavelengthUncertainty * 1e-7;
  const fringes = Math.floor(frequency * (high - low));
  return {
    pathLength,
    uncertainty: Math.hypot(frequencyUncertainty / (2 * options.refractiveIndex), pathLength * stretch),
    fringes,
    between: [1e7 / high, 1e7 / (high - fringes / frequency)],
    amplitude,
    chance,
  };
}

/** Powers of the wavenumber scaled to −1…1. */
function smoothTerms(wavenumber: Float64Array, low: number, high: number): Float64Array[] {
  const scaled = wavenumber.map((sigma) => (2 * sigma - low - high) / (high - low));
  return Array.from({ length: SMOOTH_TERMS }, (_, power) => scaled.map((x) => x ** power));
}

/** Half the sampling frequency where points are farthest apart in wavenumber, cm. */
function finestFrequency(wavenumber: Float64Array): number {
  let widest = 0;
  for (let i = 1; i < wavenumber.length; i++) widest = Math.max(widest, wavenumber[i - 1]! - wavenumber[i]!);
  return 1 / (2 * widest);
}

function powerAt(wavenumber: Float64Array, residual: Float64Array, frequency: number): number {
  let cosine = 0;
  let sine = 0;
  for (let i = 0; i < wavenumber.length; i++) {
    const phase = 2 * Math.PI * frequency * wavenumber[i]!;
    cosine += residual[i]! * Math.cos(phase);
    sine += residual[i]! * Math.sin(phase);
  }
  return cosine * cosine + sine * sine;
}

/** Gauss-Newton on the frequency; the third column is the fringe's derivative by it. */
function refine(
  wavenumber: Float64Array,
  absorbance: Float64Array,
  smooth: readonly Float64Array[],
  start: number,
  resolution: number,
) {
  const middle = wavenumber[Math.floor(wavenumber.length / 2)]!;
  let frequency = start;
  let previous = { cosine: 0, sine: 0 };
  for (let step = 0; ; step++) {
    const phase = wavenumber.map((sigma) => 2 * Math.PI * frequency * (sigma - middle));
    const cosine = phase.map(Math.cos);
    const sine = phase.map(Math.sin);
    if (step === 0) {
      const fit = fitLinear([...smooth, cosine, sine], absorbance);
      previous = { cosine: fit.coefficients[SMOOTH_TERMS]!, sine: fit.coefficients[SMOOTH_TERMS + 1]! };
    }
    const byFrequency = wavenumber.map(
      (sigma, i) => 2 * Math.PI * (sigma - middle) * (previous.sine * cosine[i]! - previous.cosine * sine[i]!),
    );
    const fit = fitLinear([...smooth, cosine, sine, byFrequency], absorbance);
    const change = fit.coefficients[SMOOTH_TERMS + 2]!;
    previous = { cosine: fit.coefficients[SMOOTH_TERMS]!, sine: fit.coefficients[SMOOTH_TERMS + 1]! };
    if (Math.abs(change) < 1e-6 * resolution || step === 20) {
      return {
        frequency,
        frequencyUncertainty: fit.standardErrors[SMOOTH_TERMS + 2]!,
        fit,
        amplitude: Math.hypot(previous.cosine, previous.sine),
      };
    }
    frequency += Math.max(-resolution / 2, Math.min(resolution / 2, change));
  }
}

function residualOf(fit: LinearFit, columns: readonly Float64Array[], y: Float64Array): Float64Array {
  return y.map((value, i) => value - columns.reduce((sum, column, j) => sum + fit.coefficients[j]! * column[i]!, 0));
}
