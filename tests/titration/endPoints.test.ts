import { describe, expect, test } from 'vitest';
import { findJumps } from '../../src/bench/titration/jumps.ts';
import { granEnd, granExcess, granStart, type GranPoint } from '../../src/bench/titration/granFunction.ts';

// Potentiometric titration of 2.433 mmol of chloride with 0.1000 mol/L silver nitrate, the table of many editions of Skoog, West, Holler,
// Fundamentals of Analytical Chemistry, retyped from memory. End point there 24.34 mL; by hand 24.30 + 0.10·4.4/(4.4 + 5.9) = 24.343.
const SILVER: readonly (readonly [number, number])[] = [
  [5, 62],
  [15, 85],
  [20, 107],
  [22, 123],
  [23, 138],
  [23.5, 146],
  [23.8, 161],
  [24, 174],
  [24.1, 183],
  [24.2, 194],
  [24.3, 233],
  [24.4, 316],
  [24.5, 340],
  [24.6, 351],
  [24.7, 358],
  [25, 373],
  [25.5, 385],
  [26, 396],
  [28, 426],
];

const curve = (readings: readonly (readonly [number, number])[]) => ({
  volume: Float64Array.from(readings, ([v]) => v),
  potential: Float64Array.from(readings, ([, E]) => E),
});

describe('second derivative', () => {
  test('chloride with silver: 24.34 mL', () => {
    const jumps = findJumps(curve(SILVER), 1);
    expect(jumps.length).toBe(1);
    expect(jumps[0]!.volume).toBeCloseTo(24.343, 3);
    expect(jumps[0]!.interval).toEqual([24.3, 24.4]);
  });

  test('a falling curve gives the same end point as its mirror', () => {
    const mirrored = SILVER.map(([v, E]) => [v, -E] as const);
    expect(findJumps(curve(mirrored), -1)[0]!.volume).toBeCloseTo(24.343, 3);
    expect(findJumps(curve(mirrored), 1)).toEqual([]);
  });

  test('scatter alone is no jump', () => {
    const noisy = Array.from({ length: 60 }, (_, i) => [i / 2, 400 + 2 * Math.sin(i * i)] as const);
    expect(findJumps(curve(noisy), 1)).toEqual([]);
  });
});

// II/III with oxidant, 9.60 and 25.60 mL: the sample already holds 6.40 mL worth of V(III).
const SLOPE = 59.16;
const exact = (end: number, product: number, volumes: readonly number[]): GranPoint[] =>
  volumes.map((volume) => {
    const [formed, left] = [volume + product, end - volume];
    return { volume, formed, left, potential: -255 + SLOPE * Math.log10(formed / left) };
  });
const scatter = { potential: 0.5, volume: 0.001 };

describe("Gran's functions", () => {
  const volumes = Array.from({ length: 17 }, (_, i) => 1 + i / 2);

  test('the first step with its product gives 9.600 mL at the end, −6.400 at the start', () => {
    const points = exact(9.6, 6.4, volumes);
    expect(granEnd(points, -6.4, SLOPE, scatter)!.volume).toBeCloseTo(9.6, 9);
    expect(granStart(points, 9.6, SLOPE, scatter)!.volume).toBeCloseTo(-6.4, 9);
  });

  // The textbook form with v alone, unweighted, on readings each 0.5 mL from 5 to 9 mL, is 4 % off; here it is weighted, and off as well.
  test('the textbook form without the product is wrong by more than 1 %', () => {
    const points = exact(9.6, 6.4, volumes);
    expect(granEnd(points, 0, SLOPE, scatter)!.volume).toBeGreaterThan(9.7);
  });

  test('excess of titrant starts where the last step ends', () => {
    const points = Array.from({ length: 8 }, (_, i): GranPoint => {
      const formed = 0.3 + i / 2;
      return { volume: 25.6 + formed, formed, left: Infinity, potential: 1440 + SLOPE * Math.log10(formed / 25.6) };
    });
    expect(granExcess(points, SLOPE, scatter)!.volume).toBeCloseTo(25.6, 9);
  });

  test('two readings are no line', () => {
    expect(granEnd(exact(9.6, 6.4, [5, 6]), -6.4, SLOPE, scatter)).toBeNull();
  });

  // Fieller's interval by hand for the line y = 10 − x at x = 1, 2, 3 with residuals +δ, −2δ, +δ:
  // slope −1, intercept 10, s² = 6δ² on one degree of freedom, t = 12.706; with x̄ = 2 the zero is 10.
  test("Fieller's interval is that of its definition", () => {
    const delta = 0.01;
    const points = [1, 2, 3].map((volume, i): GranPoint => ({
      volume,
      formed: 1,
      left: Infinity,
      // growth of 10^(x/s) is the value itself
      potential: SLOPE * Math.log10(10 - volume + [delta, -2 * delta, delta][i]!),
    }));
    const zero = granExcess(points, SLOPE, { potential: 0, volume: 1 })!;
    const scale = 10 ** (points[1]!.potential / SLOPE);
    const [b0, b1, s2, t] = [8 / scale, -1 / scale, (6 * delta ** 2) / scale ** 2, 12.7062];
    expect(zero.volume).toBeCloseTo(10, 9);
    for (const end of zero.interval!) {
      const z = end - 2;
      const bound = t * t * s2 * (1 / 3 + (z * z) / 2);
      expect((b0 + b1 * z) ** 2 / bound).toBeCloseTo(1, 3);
    }
    expect(zero.interval![1] - 10).toBeGreaterThan(10 - zero.interval![0]);
  });
});
