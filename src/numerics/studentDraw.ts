import type { Random } from './random.ts';

/**
 * A draw from Student's t, which has fatter tails than a normal deviate the fewer degrees of freedom there are.
 * t = x √(ν (w^(−2/ν) − 1)/w) with x, y uniform in the unit disc, w = x² + y² (Bailey, Math. Comp. 1994, 62, 779).
 * @param freedom above 0; Infinity gives a normal deviate
 */
export function studentDraw(random: Random, freedom: number): number {
  if (freedom === Infinity) return random.normal();
  for (;;) {
    const x = 2 * random.uniform() - 1;
    const y = 2 * random.uniform() - 1;
    const w = x * x + y * y;
    if (w < 1 && w > 0) return x * Math.sqrt((freedom * (w ** (-2 / freedom) - 1)) / w);
  }
}
