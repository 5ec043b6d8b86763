import type { Finding } from '../../finding.ts';
import { COUPLES, type Titrant } from './couples.ts';
import type { Course } from './course.ts';
import type { TitrationCurve } from './curve.ts';
import type { Jump } from './jumps.ts';

/** V between the levels promised and seen, root mean square, beyond which another label is tried [practice]. */
const LEVEL_LIMIT = 0.08;
/** Readings between two jumps: fewer, and the jumps are one. */
const BETWEEN = 3;

/** Why the end points of a course cannot be told from its curve; null where they can. */
export function missingSteps(
  curve: TitrationCurve,
  course: Course,
  titrant: Titrant,
  jumps: readonly Jump[],
): Finding | null {
  const needed = course.steps.length;
  const allowed = needed + (course.further ? 1 : 0);
  if (jumps.length > allowed)
    return {
      code: 'label-disagrees',
      severity: 'withhold',
      message: `${jumps.length} steps (at ${volumes(jumps)} mL) where ${course.name} has ${needed}: the sample holds other states than the sheet says`,
      hint: 'check pair and titrant on the sheet; one run is one sample',
    };
  if (jumps.length < needed) return tooFew(curve, course, jumps);
  for (let j = 1; j < needed; j++) {
    const between = curve.volume.filter((v) => v > jumps[j - 1]!.interval[1] && v < jumps[j]!.interval[0]).length;
    if (between < BETWEEN) return overlap(`only ${between} readings lie between the jumps at ${volumes(jumps)} mL`);
  }
  return levelsDisagree(curve, course, titrant, jumps);
}

function tooFew(curve: TitrationCurve, course: Course, jumps: readonly Jump[]): Finding {
  const still = standsStill(curve, course);
  if (still !== null)
    return {
      code: 'titrant-used-up',
      severity: 'withhold',
      message: `the potential stands still from ${still.toFixed(2)} mL on, before ${course.steps[jumps.length]}: nothing reached the beaker`,
      hint: 'was the burette empty, or the tip out of the solution? titrate a new portion',
    };
  const merged = jumps.find((jump) => heightOf(curve, course, jump) > mergedHeight(course));
  if (merged)
    return overlap(
      `one jump of ${heightOf(curve, course, merged).toFixed(0)} mV at ${merged.volume.toFixed(2)} mL spans two steps`,
    );
  const last = curve.volume.at(-1)!;
  return {
    code: 'end-point-missing',
    severity: 'withhold',
    message: `${jumps.length === 0 ? 'no jump' : `${jumps.length} of ${course.steps.length} jumps (at ${volumes(jumps)} mL)`} up to ${last} mL: ${course.steps[jumps.length]} is not shown to its end`,
    hint: 'titrate on until the potential has jumped and levelled off; nothing is extrapolated. A first jump within the first two additions needs smaller ones',
  };
}

const overlap = (seen: string): Finding => ({
  code: 'steps-overlap',
  severity: 'withhold',
  message: `${seen}: the steps cannot be told apart`,
  hint: 'smaller additions, and more of the reagent or sample that makes the short step',
});

const volumes = (jumps: readonly Jump[]): string => jumps.map(({ volume }) => volume.toFixed(2)).join(', ');

/**
 * Volume from which the potential no longer answers; null where it does to the end. In the flattest place of a step of the whole curve's
 * length it still moves by 4s/ln 10 over that length: a tenth of that is silence.
 */
function standsStill({ volume, potential }: TitrationCurve, course: Course): number | null {
  const end = volume.length - 1;
  const range = volume[end]! - volume[0]!;
  const least = (0.1 * 4 * 25.7) / range;
  let from = end;
  while (
    from > 0 &&
    (course.direction * (potential[end]! - potential[from - 1]!)) / (volume[end]! - volume[from - 1]!) < least
  )
    from--;
  return end - from >= 4 && volume[end]! - volume[from]! > 0.04 * range ? volume[from]! : null;
}

/** mV between the flattest places on both sides of a jump. */
function heightOf({ volume, potential }: TitrationCurve, { direction }: Course, jump: Jump): number {
  const width = Math.max(0.05 * volume.at(-1)!, 3 * (jump.interval[1] - jump.interval[0]));
  const near = Array.from(volume.keys()).filter((i) => Math.abs(volume[i]! - jump.volume) <= width);
  return direction * (potential[near.at(-1)!]! - potential[near[0]!]!);
}

/** Four fifths of the sum of two jumps: more than any one of them. */
function mergedHeight({ levels }: Course): number {
  if (levels.length < 3) return Infinity;
  return 800 * Math.abs(levels.at(-1)! - levels[0]!);
}

/** The three ladders an oxidation can climb, without its titrant. */
const LADDERS = [
  { name: 'II/III', couples: [COUPLES['V2/V3'], COUPLES['V3/V4'], COUPLES['V4/V5']] },
  { name: 'III/IV', couples: [COUPLES['V3/V4'], COUPLES['V4/V5']] },
  { name: 'IV/V after iron(II)', couples: [COUPLES.iron, COUPLES['V4/V5']] },
] as const;

/** Whether the potentials between the jumps fit another ladder much better than the one promised. */
function levelsDisagree(
  curve: TitrationCurve,
  course: Course,
  titrant: Titrant,
  jumps: readonly Jump[],
): Finding | null {
  if (course.direction < 0 || course.levels.length < 3) return null;
  const ends = [...jumps.slice(0, 2).map(({ volume }) => volume), jumps[2]?.volume ?? Infinity];
  const seen = ends.map((end, k) => levelBetween(curve, k === 0 ? -Infinity : ends[k - 1]!, end) / 1000);
  if (!seen.every(Number.isFinite)) return null;
  const misfit = (levels: readonly number[]): number => {
    const offsets = seen.map((E, k) => E - levels[k]!);
    const mean = offsets.reduce((sum, offset) => sum + offset, 0) / 3;
    return Math.sqrt(offsets.reduce((sum, offset) => sum + (offset - mean) ** 2, 0) / 2);
  };
  const own = misfit(course.levels);
  const rivals = LADDERS.map(({ name, couples }) => ({
    name,
    misfit: misfit([...couples, COUPLES[titrant]].slice(0, 3).map(({ formalPotential }) => formalPotential)),
  })).sort((a, b) => a.misfit - b.misfit);
  if (own < LEVEL_LIMIT || rivals[0]!.misfit > own / 2) return null;
  return {
    code: 'label-disagrees',
    severity: 'withhold',
    message: `potentials of ${seen.map((E) => (1000 * E).toFixed(0)).join(', ')} mV between the jumps fit ${rivals[0]!.name}, not ${course.name} (steps of ${differences(course.levels)} mV)`,
    hint: 'check pair and titrant on the sheet: an over-discharged side holds another pair',
  };
}

const differences = (levels: readonly number[]): string =>
  levels
    .slice(1)
    .map((level, i) => (1000 * (level - levels[i]!)).toFixed(0))
    .join(' and ');

/** Median potential of the readings between two jumps, mV; NaN where there are none. */
function levelBetween({ volume, potential }: TitrationCurve, from: number, to: number): number {
  const inside = potential.filter((_, i) => volume[i]! > from && volume[i]! < to).sort();
  return inside[Math.floor(inside.length / 2)] ?? NaN;
}
