// What        Exponentially weighted moving average of a check standard: remembers, so that small lasting shifts add up.
// Equation    e_t = λ d_t + (1 − λ) e_{t−1}, e_0 = 0; limits ± L √(λ/(2 − λ)), the value they settle at.
// Why so      the settled limits from the first point on: the average run length can then be stated exactly (`runLength.ts`).
// Valid for   0 < λ ≤ 1 (1 is the Shewhart chart itself); missing points leave the average where it was.
// Units       d and e in standard deviations of the baseline.
// Source      S. W. Roberts, Technometrics 1959, 1, 239; J. M. Lucas, M. S. Saccucci, Technometrics 1990, 32, 1.

export interface MovingAverageDesign {
  /** λ: share of the newest point, above 0 up to 1 */
  readonly weight: number;
  /** L: limit in standard deviations of the average */
  readonly limit: number;
}

/** Lucas and Saccucci 1990: in-control run length 500, best for shifts near one standard deviation. */
export const DEFAULT_MOVING_AVERAGE: MovingAverageDesign = { weight: 0.2, limit: 2.962 };

/** @returns half width of the limits, in standard deviations of single points */
export const movingAverageLimit = (design: MovingAverageDesign): number =>
  design.limit * Math.sqrt(design.weight / (2 - design.weight));

/** @param deviations in standard deviations; NaN = missing, answered with NaN (nothing is drawn there) */
export function movingAverage(deviations: Float64Array, weight: number): Float64Array {
  let average = 0;
  return deviations.map((deviation) => {
    if (Number.isNaN(deviation)) return NaN;
    average = weight * deviation + (1 - weight) * average;
    return average;
  });
}
