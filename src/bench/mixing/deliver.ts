// What        How a volume is measured out, and how well.
// Equation    u = tolerance/√6 (triangular); fills of one pipette err together: n·u. Class B has twice the tolerance of class A.
// Why so      one-mark pipettes are the surest for the volumes they make; anything else comes from the smallest burette that holds it, read to
//             half a division. Volumes nobody can measure out are not planned.
// Valid for   20 °C, water-like solutions; drainage of 35 % sulfuric acid is slower: wait.
// Units       mL.
// Source      ISO 648 (pipettes), ISO 1042 (flasks), ISO 385 (burettes): class A limits, from memory; triangular: QUAM A1.
import { ONE_MARK_FLASKS, ONE_MARK_PIPETTES, type GlasswarePiece } from '../glassware.ts';

export type GlassClass = 'A' | 'B';

const PIPETTES: readonly GlasswarePiece[] = [
  ...ONE_MARK_PIPETTES,
  { volume: 20, tolerance: 0.03 },
  { volume: 25, tolerance: 0.03 },
  { volume: 50, tolerance: 0.05 },
];

const FLASKS: readonly GlasswarePiece[] = [
  { volume: 5, tolerance: 0.025 },
  ...ONE_MARK_FLASKS,
  { volume: 20, tolerance: 0.04 },
  { volume: 200, tolerance: 0.15 },
  { volume: 250, tolerance: 0.15 },
  { volume: 500, tolerance: 0.25 },
  { volume: 1000, tolerance: 0.4 },
  { volume: 2000, tolerance: 0.6 },
];

/** Burettes with their smallest division. */
const BURETTES: readonly (GlasswarePiece & { readonly division: number })[] = [
  { volume: 10, tolerance: 0.02, division: 0.02 },
  { volume: 25, tolerance: 0.03, division: 0.05 },
  { volume: 50, tolerance: 0.05, division: 0.1 },
];

/** Below this a burette says little: 0.5 mL ± 0.008 is 1.6 %. */
export const LEAST_VOLUME = 0.5;

export interface Delivery {
  /** what can be measured out, nearest to what was asked */
  readonly volume: number;
  /** k = 1 */
  readonly uncertainty: number;
  /** e.g. `10 mL pipette, twice` */
  readonly by: string;
}

const standard = (tolerance: number, glassClass: GlassClass): number =>
  ((glassClass === 'B' ? 2 : 1) * tolerance) / Math.sqrt(6);

const TIMES = ['', '', ', twice', ', three times'];

/** @param volume mL */
export function deliver(volume: number, glassClass: GlassClass): Delivery {
  const largest = BURETTES.at(-1)!;
  if (volume > largest.volume) {
    const fills = Math.floor(volume / largest.volume);
    const pipette = PIPETTES.find((piece) => piece.volume === largest.volume)!;
    const rest = deliver(volume - fills * pipette.volume, glassClass);
    const many = `${pipette.volume} mL pipette${fills < TIMES.length ? TIMES[fills] : `, ${fills} times`}`;
    const sure = fills * standard(pipette.tolerance, glassClass);
    if (rest.volume === 0) return { volume: fills * pipette.volume, uncertainty: sure, by: many };
    return {
      volume: fills * pipette.volume + rest.volume,
      uncertainty: Math.hypot(sure, rest.uncertainty),
      by: `${many}, and ${rest.volume} mL by ${rest.by}`,
    };
  }
  const burette = BURETTES.find((piece) => piece.volume >= volume)!;
  const rounded = Math.round(volume / (burette.division / 2)) * (burette.division / 2);
  for (const fills of [1, 2, 3]) {
    const pipette = PIPETTES.find((piece) => Math.abs(fills * piece.volume - volume) <= burette.division / 4);
    const uncertainty = fills * standard(pipette?.tolerance ?? Infinity, glassClass);
    if (pipette && uncertainty <= 2 * standard(burette.tolerance, glassClass))
      return { volume: fills * pipette.volume, uncertainty, by: `${pipette.volume} mL pipette${TIMES[fills]}` };
  }
  return {
    volume: Number(rounded.toFixed(3)),
    // reading at the start and at the end, each within a quarter of a division
    uncertainty: Math.hypot(
      standard(burette.tolerance, glassClass),
      (Math.SQRT2 * burette.division) / 4 / Math.sqrt(6),
    ),
    by: `${burette.volume} mL burette`,
  };
}

/** Standard uncertainty of a flask of this volume; null where there is none. */
export function flaskUncertainty(volume: number, glassClass: GlassClass): number | null {
  const flask = FLASKS.find((piece) => piece.volume === volume);
  return flask ? standard(flask.tolerance, glassClass) : null;
}

export const FLASK_VOLUMES: readonly number[] = FLASKS.map(({ volume }) => volume).sort((a, b) => a - b);
