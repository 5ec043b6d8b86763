// What        Means over any interval of a curve that is known by its means over neighbouring bins.
// Equation    C(e) = Σ of bin areas up to edge e; between edges a cubic with slopes s = 7/12 (a_j + a_{j+1}) − 1/12 (a_{j−1} + a_{j+2});
//             mean over [p, q] = (C(q) − C(p))/(q − p).
// Why so      A calibration holds means over its step. Interpolating them as if they were points loses half a curvature at every peak; this
//             curve has exactly the means it was made from, so a finer axis averaged back gives the calibration's own values to rounding.
// Valid for   bins of one width; at most one bin beyond the ends, where the end's slope goes on.
// Units       those of the curve.
// Source      Colella, Woodward, J. Comput. Phys. 1984, 54, 174 (edge values); use ours.

/**
 * @param centre first bin's centre @param width of every bin @param means of the bins, two or more
 * @returns mean of the curve over [from, to]
 */
export function binMeansCurve(
  centre: number,
  width: number,
  means: ArrayLike<number>,
): (from: number, to: number) => number {
  const count = means.length;
  const value = (j: number): number => {
    if (j < 0) return means[0]! + j * (means[1]! - means[0]!);
    if (j >= count) return means[count - 1]! + (j - count + 1) * (means[count - 1]! - means[count - 2]!);
    return means[j]!;
  };
  const area = new Float64Array(count + 1);
  for (let j = 0; j < count; j++) area[j + 1] = area[j]! + means[j]!;
  // Slope of the area at edge j, which lies between bins j − 1 and j.
  const slope = Float64Array.from(
    { length: count + 1 },
    (_, j) => (7 * (value(j - 1) + value(j)) - value(j - 2) - value(j + 1)) / 12,
  );
  const areaAt = (position: number): number => {
    if (position <= 0) return position * slope[0]!;
    if (position >= count) return area[count]! + (position - count) * slope[count]!;
    const j = Math.min(count - 1, Math.floor(position));
    const t = position - j;
    const rise = area[j + 1]! - area[j]!;
    const bend = slope[j]! + slope[j + 1]! - 2 * rise;
    return area[j]! + t * (slope[j]! + t * (rise - slope[j]! - bend + t * bend));
  };
  const start = centre - width / 2;
  return (from, to) => ((areaAt((to - start) / width) - areaAt((from - start) / width)) * width) / (to - from);
}
