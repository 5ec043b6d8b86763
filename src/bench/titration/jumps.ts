// What        Where the potential jumps: the steps of a titration curve and the zero of the second derivative inside each.
// Equation    d = ΔE/Δv over a window w; v = v_a + (v_b − v_a)·D_a/(D_a − D_b), D the second differences on either side of the steepest interval.
// Why so      A jump is told from noise by how far its slope stands above the flattest stretch on both sides (its prominence), which needs no
//             knowledge of the chemistry. The window is the spacing of the readings, wider only where their scatter would show in d.
//             Between two readings that straddle a sharp jump nothing is known of the place but the interval: u = width/√12,
//             and the whole width at half height where the jump is blunt, because its inflection need not be the end point.
// Valid for   curves with a few readings on each side of every jump.
// Units       mL, mV.
// Source      second-difference rule of analytical textbooks; rectangular distribution: JCGM 100, 4.3.7.
import { potentialNoise, type TitrationCurve } from './curve.ts';

export interface Jump {
  /** mL, zero of the second derivative */
  readonly volume: number;
  /** mL, standard uncertainty by the width of the steepest interval */
  readonly uncertainty: number;
  /** the steepest interval, mL */
  readonly interval: readonly [number, number];
  /** mV at the jump */
  readonly potential: number;
}

/** Slope above that of the flatter side by this factor makes a jump. [practice] */
const PROMINENCE = 4;
/** mV the potential must stay higher behind a jump: a stray reading falls back. [practice] */
const LEAST_RISE = 40;
/** A jump that is this much wider at half height than its steepest interval is blunt. */
const BLUNT = 1.5;
/** Window as share of the volume delivered. */
const WINDOW = 0.012;

/** @param direction +1 where the potential should rise, −1 where it should fall */
export function findJumps(curve: TitrationCurve, direction: 1 | -1): Jump[] {
  const { volume } = curve;
  const rising = { volume, potential: curve.potential.map((E) => direction * E) };
  const noise = potentialNoise(curve);
  const range = volume.at(-1)! - volume[0]!;
  const middles = Array.from({ length: volume.length - 1 }, (_, i) => (volume[i]! + volume[i + 1]!) / 2);
  const slopes = middles.map((middle, i) => {
    const width = Math.max(volume[i + 1]! - volume[i]!, WINDOW * range);
    return (at(rising, middle + width / 2) - at(rising, middle - width / 2)) / width;
  });
  // Below this a slope is not to be told from scatter or from a dead electrode.
  const floor = Math.max((3 * Math.SQRT2 * noise) / (WINDOW * range), 20 / range);
  return prominentPeaks(slopes, floor)
    .filter((peak) => {
      const reach = 2 * Math.max(volume[peak + 1]! - volume[peak]!, WINDOW * range);
      return at(rising, middles[peak]! + reach) - at(rising, middles[peak]! - reach) > LEAST_RISE;
    })
    .map((peak) => locate(rising, middles[peak]!, noise, WINDOW * range, direction));
}

/** Potential by straight lines between readings; beyond the ends that of the end. */
function at({ volume, potential }: TitrationCurve, v: number): number {
  if (v <= volume[0]!) return potential[0]!;
  let i = 1;
  while (i < volume.length - 1 && volume[i]! < v) i++;
  const share = Math.min(1, (v - volume[i - 1]!) / (volume[i]! - volume[i - 1]!));
  return potential[i - 1]! + share * (potential[i]! - potential[i - 1]!);
}

/** Indices of maxima that stand PROMINENCE times above the lowest slope between them and anything higher, on both sides. */
function prominentPeaks(slopes: readonly number[], floor: number): number[] {
  const isPeak = (i: number): boolean => {
    const height = slopes[i]!;
    const lowestTowards = (stride: 1 | -1): number => {
      let lowest = Infinity;
      for (let j = i + stride; j >= 0 && j < slopes.length; j += stride) {
        if (slopes[j]! > height || (slopes[j] === height && stride === -1)) break;
        lowest = Math.min(lowest, slopes[j]!);
      }
      return lowest;
    };
    return height >= PROMINENCE * Math.max(floor, lowestTowards(1), lowestTowards(-1));
  };
  return slopes.flatMap((_, i) => (isPeak(i) ? [i] : []));
}

function locate(rising: TitrationCurve, near: number, noise: number, window: number, direction: 1 | -1): Jump {
  const { volume, potential } = rising;
  let top = -1;
  const slope = (i: number): number => (potential[i + 1]! - potential[i]!) / (volume[i + 1]! - volume[i]!);
  for (let i = 0; i + 1 < volume.length; i++)
    if (Math.abs((volume[i]! + volume[i + 1]!) / 2 - near) <= window && (top < 0 || slope(i) > slope(top))) top = i;
  const gap = volume[top + 1]! - volume[top]!;
  // Scatter below 5 % of the slope: else the window is widened, on equidistant interpolated points.
  const width = Math.max(gap, (Math.SQRT2 * noise) / (0.05 * Math.max(slope(top), 1e-9)));
  const left = width > gap ? near - width / 2 : volume[top]!;
  const right = left + width;
  const before = width > gap ? left - width : (volume[top - 1] ?? left - width);
  const after = width > gap ? right + width : (volume[top + 2] ?? right + width);
  const steep = (at(rising, right) - at(rising, left)) / width;
  const rise = (steep - (at(rising, left) - at(rising, before)) / (left - before)) / ((right - before) / 2);
  const fall = ((at(rising, after) - at(rising, right)) / (after - right) - steep) / ((after - left) / 2);
  const blunt = halfHeightWidth(rising, left, right, steep);
  const share = rise > 0 && fall < 0 ? rise / (rise - fall) : 0.5;
  return {
    volume: left + width * share,
    uncertainty: Math.max(width / Math.sqrt(12), blunt > BLUNT * width ? blunt : 0),
    interval: [left, right],
    potential: (direction * (at(rising, left) + at(rising, right))) / 2,
  };
}

/** How long the potential climbs at least half as fast as in the steepest interval: a blunt jump need not be symmetric about the end point. */
function halfHeightWidth(rising: TitrationCurve, left: number, right: number, steep: number): number {
  const width = right - left;
  const reach = (stride: 1 | -1): number => {
    let end = stride === 1 ? right : left;
    while ((stride * (at(rising, end + stride * width) - at(rising, end))) / width > steep / 2) end += stride * width;
    return end;
  };
  return reach(1) - reach(-1);
}
