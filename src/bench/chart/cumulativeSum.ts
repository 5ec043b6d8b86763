// What        Cumulative sums of a check standard, one a direction: the quickest to find a lasting shift of known size.
// Equation    up_t = max(0, up_{t−1} + d_t − k), down_t = max(0, down_{t−1} − d_t − k); signal above h.
// Why so      the last zero before a signal dates the change: that is the line people ask for.
// Valid for   k ≥ 0, h > 0; missing points leave the sums where they were.
// Units       d, k, h in standard deviations of the baseline.
// Source      E. S. Page, Biometrika 1954, 41, 100; NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.3.

export interface CumulativeSumDesign {
  /** k: half the shift to be found, standard deviations */
  readonly slack: number;
  /** h: decision limit, standard deviations */
  readonly limit: number;
}

/** k = 0.5 looks for shifts of one standard deviation; h = 5 gives an in-control run length of 465 (Hawkins 1993). */
export const DEFAULT_CUMULATIVE_SUM: CumulativeSumDesign = { slack: 0.5, limit: 5 };

export interface CumulativeSums {
  readonly up: Float64Array;
  readonly down: Float64Array;
  /** for each point the index of the first point after the upper (lower) sum was last zero: where a shift would have begun */
  readonly upSince: Int32Array;
  readonly downSince: Int32Array;
}

/** @param deviations in standard deviations; NaN = missing, answered with NaN */
export function cumulativeSums(deviations: Float64Array, slack: number): CumulativeSums {
  const rising = oneSided(deviations, slack, 1);
  const falling = oneSided(deviations, slack, -1);
  return { up: rising.sum, down: falling.sum, upSince: rising.since, downSince: falling.since };
}

function oneSided(deviations: Float64Array, slack: number, sign: 1 | -1) {
  const since = new Int32Array(deviations.length);
  let total = 0;
  let start = 0;
  const sum = deviations.map((deviation, i) => {
    if (Number.isNaN(deviation)) {
      since[i] = start;
      return NaN;
    }
    if (total === 0) start = i;
    total = Math.max(0, total + sign * deviation - slack);
    since[i] = start;
    return total;
  });
  return { sum, since };
}
