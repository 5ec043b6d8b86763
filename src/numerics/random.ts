import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';

/** A repeatable source of chance: the only one in the house, always passed in, never hidden. */
export interface Random {
  /** 0 included … 1 excluded */
  uniform(): number;
  /** mean 0, standard deviation 1 */
  normal(): number;
}

/** Draws thrown away first: generators of neighbouring seeds start alike. */
const WARM_UP = 32;

/**
 * xoroshiro128+ of pure-rand (period 2¹²⁸ − 1); normal deviates by the polar method (Marsaglia, Bray, SIAM Rev. 1964, 6, 260).
 * @param seed a whole number; the same seed gives the same numbers on every machine
 */
export function seededRandom(seed: number): Random {
  const generator = xoroshiro128plus(seed);
  for (let i = 0; i < WARM_UP; i++) generator.next();
  const uniform = (): number => uniformFloat64(generator);
  let spare: number | null = null;
  return {
    uniform,
    normal: () => {
      if (spare !== null) {
        const kept = spare;
        spare = null;
        return kept;
      }
      for (;;) {
        const x = 2 * uniform() - 1;
        const y = 2 * uniform() - 1;
        const square = x * x + y * y;
        if (square >= 1 || square === 0) continue;
        const factor = Math.sqrt((-2 * Math.log(square)) / square);
        spare = y * factor;
        return x * factor;
      }
    },
  };
}
