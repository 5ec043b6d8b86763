import type { MeasuredProperty } from '../../assay/instrumentRecord.ts';
import { fitLinear } from '../../numerics/linearFit.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';

/**
 * Absorbance at one wavelength: a parabola through the points within 2 nm (at least five), so that noise averages and a broad
 * extremum is not flattened.
 * @param nm in nm
 * @returns null where the spectrum has no five points about that wavelength
 */
export function absorbanceAt({ wavelength, absorbance }: Spectrum, nm: number): MeasuredProperty | null {
  const last = wavelength.length - 1;
  if (nm < wavelength[0]! || nm > wavelength[last]!) return null;
  const pitch = (wavelength[last]! - wavelength[0]!) / last;
  const half = Math.max(2, 2.01 * pitch);
  const points = [...wavelength.keys()].filter(
    (i) => Math.abs(wavelength[i]! - nm) <= half && Number.isFinite(absorbance[i]),
  );
  if (points.length < 5) return null;
  const x = Float64Array.from(points, (i) => wavelength[i]! - nm);
  const fit = fitLinear(
    [x.map(() => 1), x, x.map((v) => v * v)],
    Float64Array.from(points, (i) => absorbance[i]!),
  );
  return { value: fit.coefficients[0]!, uncertainty: fit.standardErrors[0]! };
}
