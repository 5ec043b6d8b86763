// What        The spectrum an instrument would show for an electrolyte of known composition.
// Equation    A(λ) = ℓ′ Σ_k y_k(c/D′) e_k(λ − δ), faults of `simulateFaults.ts`, noise σ(A)² = σ₀² + σ₁² 10^A;
//             each reading is the mean over the axis' own step.
// Why so      The same forward model that a calibration is inverted with, complexes at the concentration in the cuvette, so that dilution
//             sets them free as it does on the bench. Faults stay outside that model.
// Valid for   wavelengths of the calibration; nothing is extrapolated.
// Units       mol/L of the tank, cm, nm, absorbance.
// Source      Beer-Lambert law, mass action; detector noise and shot noise: any instrumental analysis text.
import { TankhueError } from '../errors.ts';
import { amountsOf, newAmounts } from '../electrolyte/forwardModel.ts';
import { SPECIES, speciesOfPair, type Pair, type Species } from '../electrolyte/species.ts';
import type { Random } from '../numerics/random.ts';
import { binMeansCurve } from '../spectrum/binMeans.ts';
import { makeSpectrum, type Spectrum } from '../spectrum/spectrum.ts';
import type { PairModel } from './pairModel.ts';
import { exposedToAir, NO_FAULTS, reading, requireFaults, type SimulatedFaults } from './simulateFaults.ts';

export interface SimulationRequest {
  readonly name: string;
  /** mol/L of the tank: one state or two neighbours; V4 and V5 are totals */
  readonly concentration: Partial<Readonly<Record<Species, number>>>;
  /** stated path, cm */
  readonly pathLength: number;
  /** stated dilution, ≥ 1; 1 when absent */
  readonly dilution?: number;
  /** whose spectra to use where two pairs hold the state (a pure V(III) or V(IV)); the first that does when absent */
  readonly pair?: Pair;
  /** nm, ascending; the calibration's own when absent */
  readonly wavelength?: Float64Array;
  readonly faults?: Partial<SimulatedFaults>;
  readonly noise?: SimulatedNoise;
}

/** All drawn anew for each spectrum; zero when absent. */
export interface SimulatedNoise {
  /** absorbance, every reading by itself */
  readonly constant?: number;
  /** absorbance at full transmission, grows as the light goes (shot noise) */
  readonly shot?: number;
  /** relative, the path from filling to filling */
  readonly filling?: number;
  /** unnamed patterns of the calibration, in their own standard deviations */
  readonly pattern?: number;
}

/**
 * @param calibration or anything that holds models of pairs
 * @param random needed when there is noise; the same seed gives the same spectrum
 * @throws TankhueError `cannot-coexist`, `no-vanadium`, `not-calibrated`, `axis-outside`, `out-of-range`
 */
export function simulateSpectrum(
  calibration: { readonly pairs: readonly { readonly model: PairModel }[] },
  request: SimulationRequest,
  random: Random,
): Spectrum {
  const faults = { ...NO_FAULTS, ...request.faults };
  requireFaults(faults);
  requirePositive('pathLength', request.pathLength, 'cm');
  const model = modelHolding(calibration.pairs, request);
  const axis = request.wavelength ?? model.wavelength;
  requireInside(axis, model.wavelength);
  const { constant = 0, shot = 0, filling = 0, pattern = 0 } = request.noise ?? {};
  const absorbance = trueAbsorbance(model, request, faults, axis);
  const scale = 1 + filling * random.normal();
  const patterns = pattern === 0 ? null : drawnPattern(model, pattern, axis, random);
  const middle = (axis[0]! + axis[axis.length - 1]!) / 2;
  const shown = absorbance.map((value, i) => {
    const own = scale * value + (patterns?.[i] ?? 0);
    const noise = Math.sqrt(constant * constant + shot * shot * 10 ** Math.max(0, own));
    const seen = reading(own, axis[i]!, faults, middle, request.pathLength);
    return noise === 0 ? seen : seen + noise * random.normal();
  });
  return makeSpectrum(request.name, Float64Array.from(axis), shown);
}

/** Absorbance of the cuvette without any optical fault, on an axis read `wavelengthShift` too long. */
function trueAbsorbance(
  model: PairModel,
  request: SimulationRequest,
  faults: SimulatedFaults,
  axis: Float64Array,
): Float64Array {
  const none = { V2: 0, V3: 0, V4: 0, V5: 0 };
  const tank = exposedToAir({ ...none, ...request.concentration }, faults.airExposure);
  const dilution = (request.dilution ?? 1) * faults.dilutionFactor;
  const [lower, higher] = speciesOfPair(model.pair);
  const { amount } = amountsOf(model.pair, model.associations)(
    tank[lower] / dilution,
    tank[higher] / dilution,
    newAmounts(model.spectra.length),
  );
  const pathLength = request.pathLength * faults.pathFactor;
  const onGrid = model.wavelength.map((_, i) =>
    model.spectra.reduce((sum, spectrum, k) => sum + pathLength * amount[k]! * spectrum[i]!, 0),
  );
  return onAxis(model.wavelength, onGrid, axis, faults.wavelengthShift);
}

function drawnPattern(model: PairModel, size: number, axis: Float64Array, random: Random): Float64Array {
  const onGrid = new Float64Array(model.wavelength.length);
  for (const mode of model.modes) {
    const amplitude = size * random.normal();
    for (let i = 0; i < onGrid.length; i++) onGrid[i]! += amplitude * mode[i]!;
  }
  return onAxis(model.wavelength, onGrid, axis, 0);
}

/** Means over the axis' own steps. */
function onAxis(grid: Float64Array, values: Float64Array, axis: Float64Array, shift: number): Float64Array {
  const mean = binMeansCurve(grid[0]!, grid[1]! - grid[0]!, values);
  return axis.map((nm, i) => {
    const half = stepAt(axis, i) / 2;
    return mean(nm - shift - half, nm - shift + half);
  });
}

function stepAt(axis: Float64Array, i: number): number {
  const below = Math.max(0, i - 1);
  const above = Math.min(axis.length - 1, i + 1);
  return (axis[above]! - axis[below]!) / (above - below);
}

function modelHolding(pairs: readonly { readonly model: PairModel }[], request: SimulationRequest): PairModel {
  const given = SPECIES.filter((species) => (request.concentration[species] ?? 0) !== 0);
  for (const species of SPECIES) {
    const value = request.concentration[species] ?? 0;
    if (!(value >= 0 && value < 50))
      throw new TankhueError(
        'out-of-range',
        `expected 0 mol/L or more; received ${value}`,
        `concentration.${species}`,
        'write what the tank holds',
      );
  }
  if (given.length === 0)
    throw new TankhueError('no-vanadium', 'expected vanadium; received none', 'concentration', 'write V4=0.8,V5=0.8');
  if ((request.dilution ?? 1) < 1)
    throw new TankhueError(
      'out-of-range',
      `expected a dilution of 1 or more; received ${request.dilution}`,
      'dilution',
      'write 20 for 1 mL made up to 20 mL',
    );
  const possible = pairs.filter(({ model }) => given.every((one) => speciesOfPair(model.pair).includes(one)));
  const chosen = possible.find(({ model }) => model.pair === request.pair) ?? possible[0];
  if (chosen) return chosen.model;
  const neighbours = given.length === 1 || (given.length === 2 && adjacent(given[0]!, given[1]!));
  throw new TankhueError(
    neighbours ? 'not-calibrated' : 'cannot-coexist',
    neighbours
      ? `expected a pair of the calibration (${pairs.map(({ model }) => model.pair).join(', ')}); received ${given.join(' and ')}`
      : `expected one state or two neighbours; received ${given.join(', ')}`,
    'concentration',
    neighbours
      ? 'use a calibration that holds these states'
      : 'states two steps apart react with each other: write what is left after the reaction',
  );
}

const adjacent = (a: Species, b: Species): boolean => SPECIES.indexOf(b) - SPECIES.indexOf(a) === 1;

/** Half a step of slack at both ends, as an average at the end of an axis needs it. */
function requireInside(axis: Float64Array, grid: Float64Array): void {
  const step = grid[1]! - grid[0]!;
  const [first, last] = [grid[0]!, grid[grid.length - 1]!];
  if (axis.length >= 2 && axis[0]! >= first - step / 2 && axis[axis.length - 1]! <= last + step / 2) return;
  throw new TankhueError(
    'axis-outside',
    `expected two wavelengths or more inside ${first} to ${last} nm, which the calibration covers; received ${axis[0]} to ${axis[axis.length - 1]} nm`,
    'wavelength',
    'ask for less, nothing is extrapolated',
  );
}

function requirePositive(name: string, value: number, unit: string): void {
  if (value > 0 && Number.isFinite(value)) return;
  throw new TankhueError('out-of-range', `expected more than 0 ${unit}; received ${value}`, name, 'write 1mm or 0.1cm');
}
