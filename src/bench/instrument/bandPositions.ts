// What        Where an instrument sees a narrow absorption band: the maximum of a quartic through the points around it.
// Equation    A = Σ_{p=0…4} c_p x^p about the highest point, equally many points on both sides; maximum where the derivative is 0.
// Why so      a quartic follows the lean and the shoulders of a band that a parabola would read as a shift; its covariance says how
//             sure the place is: the maximum moves by −Σ p x^(p−1) δc_p / curvature.
// Valid for   bands wider than the fit's half width; three points or more on each side.
// Units       nm.
// Source      ours.
import { studentQuantile } from '../../numerics/distributions.ts';
import { fitLinear } from '../../numerics/linearFit.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';

export interface BandPosition {
  readonly position: number;
  /** from the scatter about the quartic */
  readonly uncertainty: number;
}

/** nm on either side of the maximum; three points for coarse scans. */
const HALF_WIDTH = 1.5;
const LEAST_SIDE = 3;
/** Φ(1) */
const ONE_SIGMA = 0.8413447460685429;
const POWERS = [0, 1, 2, 3, 4];

/** @returns null when there is no maximum within `reach` nm of `expected`, or too few points */
export function bandPosition(spectrum: Spectrum, expected: number, reach: number): BandPosition | null {
  const { wavelength, absorbance } = spectrum;
  const near = [...wavelength.keys()].filter(
    (i) => Math.abs(wavelength[i]! - expected) <= reach && Number.isFinite(absorbance[i]),
  );
  if (near.length < 2) return null;
  const pitch = (wavelength[near[near.length - 1]!]! - wavelength[near[0]!]!) / (near.length - 1);
  const side = Math.max(LEAST_SIDE, Math.round(HALF_WIDTH / pitch));
  let centre = near.reduce((top, i) => (absorbance[i]! > absorbance[top]! ? i : top));
  // Noise may have lifted a neighbour: move to the point nearest to the fitted maximum until it stays.
  for (let step = 0; step < 5; step++) {
    const fitted = maximumOfQuartic(spectrum, centre, side);
    if (!fitted || Math.abs(fitted.position - expected) > reach) return null;
    const moved = Math.round((fitted.position - wavelength[centre]!) / pitch);
    if (moved === 0 || step === 4) return fitted;
    centre += moved;
  }
  return null;
}

function maximumOfQuartic({ wavelength, absorbance }: Spectrum, centre: number, side: number): BandPosition | null {
  if (centre - side < 0 || centre + side >= wavelength.length) return null;
  const half = wavelength[centre + side]! - wavelength[centre]!;
  const x = wavelength.slice(centre - side, centre + side + 1).map((nm) => (nm - wavelength[centre]!) / half);
  const y = absorbance.slice(centre - side, centre + side + 1);
  if (!y.every(Number.isFinite)) return null;
  const fit = fitLinear(
    POWERS.map((power) => x.map((v) => v ** power)),
    y,
  );
  const c = fit.coefficients;
  const slopeAt = (at: number) => POWERS.slice(1).reduce((sum, p) => sum + p * c[p]! * at ** (p - 1), 0);
  const curvatureAt = (at: number) => POWERS.slice(2).reduce((sum, p) => sum + p * (p - 1) * c[p]! * at ** (p - 2), 0);
  let at = 0;
  for (let step = 0; step < 20 && Math.abs(at) <= 1; step++) at -= slopeAt(at) / curvatureAt(at);
  const curvature = curvatureAt(at);
  if (!(curvature < 0 && Math.abs(at) <= 1)) return null;
  let variance = 0;
  for (const p of POWERS.slice(1))
    for (const q of POWERS.slice(1)) variance += p * at ** (p - 1) * q * at ** (q - 1) * fit.covariance[p * 5 + q]!;
  // Few points: the scatter is itself uncertain, so one standard uncertainty is Student's 68 %.
  const widened = studentQuantile(ONE_SIGMA, fit.degreesOfFreedom);
  return {
    position: wavelength[centre]! + half * at,
    uncertainty: (widened * half * Math.sqrt(variance)) / -curvature,
  };
}
