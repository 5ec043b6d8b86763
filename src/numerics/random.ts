import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { TankhueError } from '../errors.ts';

/** A repeatable source of chance: the only one in the house, always passed in, never hidden. */
export interface Random {
  /** 0 included … 1 excluded */
  uniform(): number;
  /** mean 0, standard deviation 1 */
  normal(): number;
}

export interface SeededRandom extends Random {
  /**
   * A source of its own for each label (a whole number), the same whatever was drawn before: work that is split or done in another order
   * gives the same numbers.
   */
  fork(label: number): SeededRandom;
}

/** Draws thrown away first: generators of neighbouring seeds start alike. */
const WARM_UP = 32;
/** Without it the fork 0 of seed 0 would be its parent. */
const FORKED = 0x9e3779b9;

/**
 * xoroshiro128+ of pure-rand (period 2¹²⁸ − 1); normal deviates by the polar method (Marsaglia, Bray, SIAM Rev. 1964, 6, 260).
 * @param seed a whole number of 32 bits; the same seed gives the same numbers on every machine
 * @throws TankhueError `seed-not-whole`: the library would cut 1.5 to 1 and 2³² + 1 to 1 in silence
 */
export function seededRandom(seed: number): SeededRandom {
  expectWhole(seed, 'seed');
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
    fork: (label) => {
      expectWhole(label, 'label');
      return seededRandom(scrambled(scrambled(seed ^ FORKED) ^ label));
    },
  };
}

/** Finaliser of MurmurHash3 (A. Appleby, public domain): every bit in moves every bit out. */
function scrambled(value: number): number {
  let h = value;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return h ^ (h >>> 16);
}

function expectWhole(value: number, where: string): void {
  if (!(Number.isInteger(value) && value >= -(2 ** 31) && value < 2 ** 32))
    throw new TankhueError(
      'seed-not-whole',
      `expected a whole number from −2147483648 to 4294967295; received ${value}`,
      where,
      'write a whole number, for example 1',
    );
}
