// What        What a spoiled cuvette or instrument does to a spectrum, from the light's side.
// Equation    A = ℓ′ Σ y_k e_k(λ − δ) + scatter (450/λ)⁴ + film (0.7 + 0.3 (450/λ)⁴);  T = (1 − f) 10^(−A) + f;
//             reading = −log₁₀((T + s)/(1 + s)) + offset + slope (λ − λ̄)/100 nm − blank.
// Why so      Each fault enters where it happens (in the tube, in the cell, beside it, in the detector, in the blank), so that several at
//             once combine as they do on a bench. It is deliberately not the list of modes the estimate knows: a fault must be able to
//             surprise it.
// Valid for   any size; a bubble below 0 or above 1 is refused.
// Units       as stated at each field.
// Source      stray light: any instrumental analysis text; water band 0.195 per cm at 970 nm, 1 L of air (25 °C) takes 34.25 mmol V(II)
//             (four electrons each of 0.2095 × 1/24.465 mol O₂); film and blank proportions ours, common practice, no source.
import { TankhueError } from '../errors.ts';
import type { Species } from '../electrolyte/species.ts';

/** Sizes of faults; none is all zeros and factors of one. */
export interface SimulatedFaults {
  /** absorbance added everywhere */
  readonly offset: number;
  /** absorbance per 100 nm, zero in the middle of the axis */
  readonly slope: number;
  /** fine particles: absorbance at 450 nm, falling with the fourth power of the wavelength */
  readonly scatter: number;
  /** deposit or scratches on a window: absorbance at 450 nm, mostly grey */
  readonly film: number;
  /** nm by which the instrument's scale reads long */
  readonly wavelengthShift: number;
  /** share of the light that passes beside the sample, 0…1 */
  readonly bubble: number;
  /** stray light, share of full transmission */
  readonly strayLight: number;
  /** real path over stated path */
  readonly pathFactor: number;
  /** real dilution over stated dilution */
  readonly dilutionFactor: number;
  /** a blank of water in another cell: absorbance by which it reads high; the water it holds more of than acid adds its band */
  readonly wrongBlank: number;
  /** volumes of air (25 °C) that one volume of undiluted sample took up; takes V(II) only */
  readonly airExposure: number;
}

export const NO_FAULTS: SimulatedFaults = {
  offset: 0,
  slope: 0,
  scatter: 0,
  film: 0,
  wavelengthShift: 0,
  bubble: 0,
  strayLight: 0,
  pathFactor: 1,
  dilutionFactor: 1,
  wrongBlank: 0,
  airExposure: 0,
};

/** mol of V(II) that one litre of air oxidises: 4 electrons × 0.2095 / 24.465 L/mol. */
const ELECTRONS_PER_LITRE_OF_AIR = (4 * 0.2095) / 24.465;

/** V(II) lost to air becomes V(III); V(III) is oxidised too slowly to count. mol/L of the undiluted sample. */
export function exposedToAir(
  concentration: Readonly<Record<Species, number>>,
  airExposure: number,
): Record<Species, number> {
  const lost = Math.min(concentration.V2, ELECTRONS_PER_LITRE_OF_AIR * airExposure);
  return { ...concentration, V2: concentration.V2 - lost, V3: concentration.V3 + lost };
}

const EXCESS_WATER = 0.2;
const waterBand = (nm: number): number => 0.195 * Math.exp(-(((nm - 970) / 30) ** 2));

/**
 * What the instrument shows for a true absorbance at one wavelength, noise apart.
 * @param middle of the axis, nm @param pathLength of the cell, cm
 */
export function reading(
  absorbance: number,
  nm: number,
  faults: SimulatedFaults,
  middle: number,
  pathLength: number,
): number {
  const violet = (450 / nm) ** 4;
  const inTheLight = absorbance + faults.scatter * violet + faults.film * (0.7 + 0.3 * violet);
  const through = (1 - faults.bubble) * 10 ** -inTheLight + faults.bubble;
  const blank = faults.wrongBlank === 0 ? 0 : faults.wrongBlank + EXCESS_WATER * pathLength * waterBand(nm);
  return (
    -Math.log10((through + faults.strayLight) / (1 + faults.strayLight)) +
    faults.offset +
    (faults.slope * (nm - middle)) / 100 -
    blank
  );
}

/** @throws TankhueError `out-of-range` */
export function requireFaults(faults: SimulatedFaults): void {
  const limits: Partial<Record<keyof SimulatedFaults, readonly [number, number, string]>> = {
    bubble: [0, 1, '0 to 1'],
    strayLight: [0, 1, '0 to 1'],
    pathFactor: [1e-6, 1e6, 'more than 0'],
    dilutionFactor: [1e-6, 1e6, 'more than 0'],
    airExposure: [0, 1e6, '0 or more'],
  };
  for (const name of Object.keys(faults) as (keyof SimulatedFaults)[]) {
    const [low, high, said] = limits[name] ?? [-100, 100, 'a finite size'];
    if (!(faults[name] >= low && faults[name] <= high))
      throw new TankhueError(
        'out-of-range',
        `expected ${said}; received ${faults[name]}`,
        `faults.${name}`,
        'give the fault another size',
      );
  }
}
