import { expect, test } from 'vitest';
import { mean, standardDeviation } from '../../src/numerics/meanAndDeviation.ts';
import { seededRandom, type Random } from '../../src/numerics/random.ts';
import { expectRefusal } from '../support/refusal.ts';

const draw = (random: Random, count: number): number[] => Array.from({ length: count }, () => random.uniform());

test('a seed repeats, another one differs', () => {
  expect(draw(seededRandom(7), 20)).toEqual(draw(seededRandom(7), 20));
  expect(draw(seededRandom(7), 20)).not.toEqual(draw(seededRandom(8), 20));
});

test('a fork does not depend on what was drawn before, nor on the order of forks', () => {
  const fresh = seededRandom(3);
  const used = seededRandom(3);
  draw(used, 1000);
  used.fork(9);
  expect(draw(used.fork(4), 20)).toEqual(draw(fresh.fork(4), 20));
  expect(draw(fresh.fork(4), 20)).not.toEqual(draw(fresh.fork(5), 20));
  expect(draw(fresh.fork(4), 20)).not.toEqual(draw(seededRandom(4).fork(3), 20));
  expect(draw(seededRandom(0).fork(0), 20)).not.toEqual(draw(seededRandom(0), 20));
});

test('forks of neighbouring labels are independent of one another and of their parent', () => {
  const root = seededRandom(1);
  const firsts = Array.from({ length: 4000 }, (_, label) => root.fork(label).uniform());
  const correlation = (lag: number): number =>
    mean(firsts.slice(lag).map((value, i) => (value - 0.5) * (firsts[i]! - 0.5))) * 12;
  // Standard error of each: 1/√4000 = 0.016.
  for (const lag of [1, 2, 8]) expect(Math.abs(correlation(lag))).toBeLessThan(0.06);
  expect(new Set(firsts).size).toBe(firsts.length);
});

test('deviates have the moments they should', () => {
  const random = seededRandom(11);
  const uniform = draw(random, 100_000);
  expect(Math.abs(mean(uniform) - 0.5)).toBeLessThan(0.004);
  expect(Math.abs(standardDeviation(uniform) - 1 / Math.sqrt(12))).toBeLessThan(0.002);
  const normal = Array.from({ length: 100_000 }, () => random.normal());
  expect(Math.abs(mean(normal))).toBeLessThan(0.013);
  expect(Math.abs(standardDeviation(normal) - 1)).toBeLessThan(0.01);
  const fourth = mean(normal.map((value) => value ** 4));
  expect(Math.abs(fourth - 3)).toBeLessThan(0.13);
});

test.each([[1.5], [NaN], [Infinity], [2 ** 32], [-(2 ** 31) - 1]])('seed %s is refused', (seed) => {
  expectRefusal(() => seededRandom(seed), 'seed-not-whole', 'seed');
  expectRefusal(() => seededRandom(1).fork(seed), 'seed-not-whole', 'label');
});
