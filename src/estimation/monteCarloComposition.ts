// What        Distributions of a share and a total from the error sources of two concentrations, by drawing.
// Equation    (a, b)_r = (a, b) + L g_r + Σ_j e_j t_jr;  share b/(a + b), total a + b. L is the Cholesky factor of Σ e eᵀ over the sources
//             that are normal, g_r two normal deviates, t_jr Student deviates of the sources with few degrees of freedom.
// Why so      Effects on the concentrations are linear, so any number of normal sources together are one bivariate normal: exact, and two
//             deviates a draw instead of one for each source. The share is not linear, and that is what drawing is for.
// Valid for   effects of one standard deviation as an assay lists them. Student sources draw u·t, as JCGM 101 has it, so that their
//             standard deviation is u·√(ν/(ν − 2)), more than u.
// Units       mol/L; share 1.
// Source      JCGM 101:2008, 6.4.8 (multivariate normal), 6.4.9 (Student), 7.
import { TankhueError } from '../errors.ts';
import { summaryOfDraws, type Drawn } from '../numerics/monteCarlo.ts';
import type { Random } from '../numerics/random.ts';
import { studentDraw } from '../numerics/studentDraw.ts';

/** Effect of one standard deviation of an independent cause on both concentrations, mol/L. */
export interface CompositionSource {
  readonly lower: number;
  readonly higher: number;
  /** degrees of freedom of the standard deviation; Infinity where it is known from experience */
  readonly freedom: number;
}

export interface DrawnComposition {
  /** of the higher species */
  readonly share: Drawn;
  /** mol/L */
  readonly total: Drawn;
}

const LEAST_TRIALS = 100;

/** @throws TankhueError `trials-few` */
export function drawComposition(
  lower: number,
  higher: number,
  sources: readonly CompositionSource[],
  trials: number,
  random: Random,
): DrawnComposition {
  if (!(Number.isInteger(trials) && trials >= LEAST_TRIALS))
    throw new TankhueError(
      'trials-few',
      `expected a whole number of trials, ${LEAST_TRIALS} or more; received ${trials}`,
      'trials',
      'write 200000 for a 95 % interval that can be reported',
    );
  const [l11, l21, l22] = factorOf(sources.filter((source) => source.freedom === Infinity));
  const few = sources.filter((source) => source.freedom < Infinity);
  const share = new Float64Array(trials);
  const total = new Float64Array(trials);
  for (let r = 0; r < trials; r++) {
    const first = random.normal();
    let a = lower + l11 * first;
    let b = higher + l21 * first + l22 * random.normal();
    for (const source of few) {
      const t = studentDraw(random, source.freedom);
      a += source.lower * t;
      b += source.higher * t;
    }
    share[r] = b / (a + b);
    total[r] = a + b;
  }
  return { share: summaryOfDraws(share), total: summaryOfDraws(total) };
}

/** Cholesky factor (l11, l21, l22) of the sum of effect·effectᵀ. */
function factorOf(sources: readonly CompositionSource[]): [number, number, number] {
  let aa = 0;
  let ab = 0;
  let bb = 0;
  for (const { lower, higher } of sources) {
    aa += lower * lower;
    ab += lower * higher;
    bb += higher * higher;
  }
  if (aa === 0) return [0, 0, Math.sqrt(bb)];
  const l11 = Math.sqrt(aa);
  const l21 = ab / l11;
  return [l11, l21, Math.sqrt(Math.max(0, bb - l21 * l21))];
}
