// What        Which readings belong to which branch of a titration curve, by their potentials.
// Equation    share formed in a step = 1/(1 + 10^(−(x − L)/s)), in excess of titrant 10^((x − L)/s) mL; x the potential with the sign that makes
//             it rise and with proton and drift effects taken out, L the branch's level.
// Why so      Near a jump an end point that is 0.1 mL off puts a reading on the wrong side, its potential does not. The same shares say how much
//             of a neighbouring couple is already, or still, at work at that potential: iron(III) and V(V) overlap by 0.2 % at 0.84 V.
// Valid for   couples that follow Nernst's law.
// Units       mL of titrant, mV.
// Source      Nernst's law.
import type { Branch, Course } from './course.ts';
import type { TitrationCurve } from './curve.ts';
import type { Jump } from './jumps.ts';

/** Slow changes of potential along the curve, mV. */
export interface SlowEffects {
  /** mV/mL from the middle of the curve */
  readonly drift: number;
  /** 1/mL, one over the volume in the beaker */
  readonly beaker: number;
}

export interface BranchReading {
  readonly index: number;
  /** mL delivered, less what a neighbouring couple has taken */
  readonly volume: number;
  /** mL of this step done, and left to do (∞ in excess of titrant), by the potential */
  readonly formed: number;
  readonly left: number;
}

export interface SelectedBranch {
  readonly branch: Branch;
  readonly readings: readonly BranchReading[];
}

export interface BranchState {
  readonly v: readonly number[];
  readonly product: number;
  /** mV per factor of ten */
  readonly slope: number;
  readonly effects: SlowEffects;
  /** L of each branch of the course, mV; NaN where it has too few readings */
  readonly levels: readonly number[];
}

/** Fewer readings of a branch do not say where it ends. */
const FEWEST = 4;

/** mV from the middle of a jump to a couple that is not modelled: its share is then below 0.2 %. */
const UNKNOWN_REACH = 80;

/** mL of product at the start of a branch. */
export const productOf = (course: Course, branch: Branch, state: { v: readonly number[]; product: number }): number =>
  course.startUnknown && branch === course.branches[0] ? state.product : branch.product(state.v);

export const widthOf = (course: Course, branch: Branch, state: { v: readonly number[]; product: number }): number =>
  branch.to === null ? Infinity : branch.to(state.v) - branch.from(state.v) + productOf(course, branch, state);

/** mV that drift and the dilution of the acid add at a volume. */
export const slowEffect = (
  branch: Branch,
  { drift, beaker }: SlowEffects,
  nernst: number,
  volume: number,
  middle: number,
): number =>
  drift * (volume - middle) -
  (branch.couple.protons / branch.couple.electrons) * nernst * Math.log10(1 + beaker * volume);

/** Levels from the middle of each stretch between jumps, before anything is fitted. */
export function firstLevels(
  curve: TitrationCurve,
  course: Course,
  jumps: readonly Jump[],
  state: BranchState,
  nernst: number,
): number[] {
  const middle = middleOf(curve);
  return course.branches.map((branch) => {
    const start = branch.from(state.v);
    const end = branch.to?.(state.v) ?? Infinity;
    const product = productOf(course, branch, state);
    const stretch = stretchOf(course, branch, state.v, jumps);
    const estimates = Array.from(curve.volume.keys())
      .filter((i) => within(curve.volume[i]!, stretch))
      .map((i) => {
        const volume = curve.volume[i]!;
        const x = course.direction * (curve.potential[i]! - slowEffect(branch, state.effects, nernst, volume, middle));
        const formed = volume - start + product;
        const ratio = end === Infinity ? formed : formed / (end - volume);
        return { distance: Math.abs(Math.log(ratio)), level: x - state.slope * Math.log10(ratio) };
      })
      .filter(({ level }) => Number.isFinite(level))
      .sort((a, b) => a.distance - b.distance);
    if (estimates.length < FEWEST) return NaN;
    // The half nearest to the middle of the step, where an end point that is off matters least.
    const half = estimates.slice(0, Math.ceil(estimates.length / 2)).map(({ level }) => level);
    return half.sort((a, b) => a - b)[Math.floor(half.length / 2)]!;
  });
}

/** Readings of each branch that lie further than `nearest` mL from both its ends, by their potential. */
export function selectReadings(
  curve: TitrationCurve,
  course: Course,
  jumps: readonly Jump[],
  state: BranchState,
  nernst: number,
  nearest: number,
): SelectedBranch[] {
  const middle = middleOf(curve);
  const share = (k: number, i: number): { formed: number; left: number } => {
    const branch = course.branches[k];
    const level = state.levels[k];
    if (!branch || level === undefined || Number.isNaN(level)) return { formed: 0, left: 0 };
    const x =
      course.direction * (curve.potential[i]! - slowEffect(branch, state.effects, nernst, curve.volume[i]!, middle));
    const power = (x - level) / state.slope;
    if (branch.to === null) return { formed: 10 ** power, left: Infinity };
    const width = widthOf(course, branch, state);
    return { formed: width / (1 + 10 ** -power), left: width / (1 + 10 ** power) };
  };
  const known = (k: number): boolean => !Number.isNaN(state.levels[k] ?? NaN);
  /** Clear of the jumps behind which a couple works that no branch describes. */
  const clearOfUnknown = (k: number, i: number): boolean =>
    jumps.every((jump) => {
      const after = curve.volume[i]! > jump.volume;
      if (known(after ? k - 1 : k + 1)) return true;
      return (after ? 1 : -1) * course.direction * (curve.potential[i]! - jump.potential) > UNKNOWN_REACH;
    });
  return course.branches
    .map((branch, k) => {
      const stretch = stretchOf(course, branch, state.v, jumps);
      const readings: BranchReading[] = [];
      for (let i = 0; known(k) && i < curve.volume.length; i++) {
        const volume = curve.volume[i]!;
        if (!within(volume, stretch) || !clearOfUnknown(k, i)) continue;
        const { formed, left } = share(k, i);
        if (!(Math.min(formed, left) > nearest)) continue;
        const neighbours = (k > 0 ? share(k - 1, i).left : 0) - share(k + 1, i).formed;
        readings.push({ index: i, volume: volume + neighbours, formed, left });
      }
      return { branch, readings };
    })
    .filter(({ readings }) => readings.length >= FEWEST);
}

export const middleOf = (curve: TitrationCurve): number => (curve.volume[0]! + curve.volume.at(-1)!) / 2;

/** From where to where a branch reaches; an end that is a jump is as wide as its steepest interval. */
function stretchOf(
  course: Course,
  branch: Branch,
  v: readonly number[],
  jumps: readonly Jump[],
): readonly [number, number] {
  const start = jumpOf(course, branch.from);
  const end = branch.to === null ? null : jumpOf(course, branch.to);
  return [
    start === null ? branch.from(v) : (jumps[start]?.interval[1] ?? Infinity),
    end === null ? (branch.to?.(v) ?? Infinity) : (jumps[end]?.interval[0] ?? branch.to!(v)),
  ];
}

const within = (volume: number, [low, high]: readonly [number, number]): boolean => volume >= low && volume <= high;

/** Which jump of the curve an end of a branch is; null for the start of the curve and what lies beyond the jumps named. */
export function jumpOf(course: Course, bound: (v: readonly number[]) => number): number | null {
  // End points without a simple relation tell the bounds apart.
  const probe = course.steps.map((_, i) => Math.sqrt(2 + i));
  const all = course.further ? [...probe, course.further(probe)] : probe;
  const index = all.indexOf(bound(probe));
  return index < 0 ? null : index;
}
