// What        An end point from one branch of a titration curve: the zero of Gran's straight line.
// Equation    in a step from a to b with r of its product there at a, x = ±E: (v − a + r)·10^(−x/s) ∝ b − v, zero at the end;
//             (b − v)·10^(x/s) ∝ v − a + r, zero at the start; in excess of titrant 10^(x/s) ∝ v − a.
//             Weights 1/σ²: scatter of E (ln 10/s·σ_E of the value) and of v. Interval of the zero by Fieller: the v with
//             (β₀ + β₁v)² ≤ t²(V₀₀ + 2vV₀₁ + v²V₁₁).
// Why so      The line takes its strength from all readings of the branch, and the weights from those near the end, where an error of E moves
//             the function least. With v alone instead of v − a + r the first step of a sample that already holds product is 4 % off.
// Valid for   couples that follow Nernst's law; volume corrections cancel in the ratio, protons are corrected before.
// Units       mL, mV.
// Source      G. Gran, Analyst 1952, 77, 661; E. C. Fieller, J. R. Stat. Soc. B 1954, 16, 175; the product term is arithmetic of ours.
import { studentQuantile } from '../../numerics/distributions.ts';
import { fitLinear } from '../../numerics/linearFit.ts';

export interface GranPoint {
  /** mL */
  readonly volume: number;
  /** mV, with the sign that makes it rise, proton and drift effects taken out */
  readonly potential: number;
  /** mL of the step done, and left to do (∞ in excess of titrant), as far as known before: they set the weight alone */
  readonly formed: number;
  readonly left: number;
}

export interface GranScatter {
  /** mV */
  readonly potential: number;
  /** mL */
  readonly volume: number;
}

export interface GranZero {
  readonly volume: number;
  readonly uncertainty: number;
  /** 95 %; null where the line is not significantly inclined */
  readonly interval: readonly [number, number] | null;
  readonly points: number;
}

/**
 * @param begin a − r: the start of the step, less the product that was there, mL
 * @param slope s, mV
 * @returns the end of the step; null with fewer than three readings
 */
export function granEnd(
  points: readonly GranPoint[],
  begin: number,
  slope: number,
  scatter: GranScatter,
): GranZero | null {
  const decay = steadied(points, -1, slope);
  return zeroOfLine(
    points,
    (point) => (point.volume - begin) * decay(point),
    ({ formed, left }) =>
      Math.hypot((left * scatter.potential * Math.LN10) / slope, (1 + left / formed) * scatter.volume),
  );
}

/** @param end b, mL @returns the start of the step, less its product; null with fewer than three readings */
export function granStart(
  points: readonly GranPoint[],
  end: number,
  slope: number,
  scatter: GranScatter,
): GranZero | null {
  const growth = steadied(points, 1, slope);
  return zeroOfLine(
    points,
    (point) => (end - point.volume) * growth(point),
    ({ formed, left }) =>
      Math.hypot((formed * scatter.potential * Math.LN10) / slope, (1 + formed / left) * scatter.volume),
  );
}

/** @returns where titrant in excess begins */
export function granExcess(points: readonly GranPoint[], slope: number, scatter: GranScatter): GranZero | null {
  return zeroOfLine(points, steadied(points, 1, slope), ({ formed }) =>
    Math.hypot((formed * scatter.potential * Math.LN10) / slope, scatter.volume),
  );
}

/** 10^(±(x − x̄)/s): the factor is free, and this one cannot overflow. */
function steadied(points: readonly GranPoint[], sign: 1 | -1, slope: number): (point: GranPoint) => number {
  const middle = points[Math.floor(points.length / 2)]?.potential ?? 0;
  return ({ potential }) => 10 ** ((sign * (potential - middle)) / slope);
}

function zeroOfLine(
  points: readonly GranPoint[],
  value: (point: GranPoint) => number,
  deviation: (point: GranPoint) => number,
): GranZero | null {
  if (points.length < 3) return null;
  // Volumes from their middle, so that the two coefficients are nearly independent.
  const origin = points.reduce((sum, point) => sum + point.volume, 0) / points.length;
  const weights = points.map((point) => 1 / deviation(point));
  const { coefficients, covariance, degreesOfFreedom } = fitLinear(
    [Float64Array.from(weights), Float64Array.from(points, (point, i) => (point.volume - origin) * weights[i]!)],
    Float64Array.from(points, (point, i) => value(point) * weights[i]!),
  );
  const [b0, b1] = [coefficients[0]!, coefficients[1]!];
  const [v00, v01, v11] = [covariance[0]!, covariance[1]!, covariance[3]!];
  const zero = -b0 / b1;
  const t2 = studentQuantile(0.975, degreesOfFreedom) ** 2;
  // (b1² − t²V11) z² + 2 (b0b1 − t²V01) z + (b0² − t²V00) ≤ 0
  const a = b1 * b1 - t2 * v11;
  const b = b0 * b1 - t2 * v01;
  const c = b0 * b0 - t2 * v00;
  const root = Math.sqrt(Math.max(0, b * b - a * c));
  return {
    volume: origin + zero,
    uncertainty: Math.sqrt(Math.max(0, v00 + 2 * zero * v01 + zero * zero * v11)) / Math.abs(b1),
    interval: a > 0 ? [origin + (-b - root) / a, origin + (-b + root) / a] : null,
    points: points.length,
  };
}
