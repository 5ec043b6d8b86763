import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { resample } from '../../src/spectrum/resample.ts';
import { makeSpectrum, type Spectrum } from '../../src/spectrum/spectrum.ts';

const spectrumOf = (wavelength: ArrayLike<number>, absorbanceAt: (nm: number, i: number) => number): Spectrum =>
  makeSpectrum('s', Float64Array.from(wavelength), Float64Array.from(wavelength, absorbanceAt));

const range = (from: number, to: number, step: number): number[] =>
  Array.from({ length: Math.round((to - from) / step) + 1 }, (_, i) => from + i * step);

const unevenAxis = fc
  .array(fc.double({ min: 0.05, max: 8, noNaN: true }), { minLength: 3, maxLength: 80 })
  .map((steps) => steps.reduce<number[]>((axis, step) => [...axis, axis.at(-1)! + step], [400]));
const width = fc.constantFrom(0, 0.3, 1, 5, 20);
const small = fc.double({ min: -2, max: 2, noNaN: true });

describe('laws', () => {
  test('a straight curve stays what it is, on any axis and at any width', () => {
    fc.assert(
      fc.property(
        unevenAxis,
        width,
        small,
        small,
        fc.array(fc.double({ min: 0, max: 1, noNaN: true })),
        (axis, w, a, b, shares) => {
          const line = (nm: number): number => a + (b * (nm - 400)) / 100;
          const target = Float64Array.from(shares, (share) => 400 + share * (axis.at(-1)! - 400)).sort();
          const { absorbance } = resample(spectrumOf(axis, line), target, w);
          target.forEach((nm, i) => expect(absorbance[i]).toBeCloseTo(line(nm), 9));
        },
      ),
    );
  });

  test('on its own axis, at its own pitch or below, a curve comes back as it was', () => {
    fc.assert(
      fc.property(fc.array(small, { minLength: 2, maxLength: 60 }), fc.constantFrom(0, 0.3, 1), (values, share) => {
        const axis = values.map((_, i) => 430 + 5 * i);
        const { absorbance, points } = resample(
          spectrumOf(axis, (_, i) => values[i]!),
          Float64Array.from(axis),
          5 * share,
        );
        values.forEach((value, i) => expect(absorbance[i]).toBeCloseTo(value, 12));
        expect([...points].every((one) => Math.abs(one - 1) < 1e-9)).toBe(true);
      }),
    );
  });

  test('nothing beyond the ends, something at and between them', () => {
    fc.assert(
      fc.property(unevenAxis, width, (axis, w) => {
        const end = axis.at(-1)!;
        const target = Float64Array.of(399.999, 400, (400 + end) / 2, end, end + 0.001);
        const { absorbance } = resample(
          spectrumOf(axis, () => 0.7),
          target,
          w,
        );
        expect([...absorbance].map((value) => Number(value.toFixed(9)))).toEqual([NaN, 0.7, 0.7, 0.7, NaN]);
      }),
    );
  });

  test('it is linear in the curve, and `points` is one over the sum of its squared weights', () => {
    fc.assert(
      fc.property(unevenAxis, width, fc.double({ min: 0, max: 1, noNaN: true }), (axis, w, share) => {
        const target = Float64Array.of(400 + share * (axis.at(-1)! - 400));
        const weights = axis.map(
          (_, k) =>
            resample(
              spectrumOf(axis, (_, i) => (i === k ? 1 : 0)),
              target,
              w,
            ).absorbance[0]!,
        );
        const { absorbance, points } = resample(
          spectrumOf(axis, (_, i) => Math.sin(i)),
          target,
          w,
        );
        expect(weights.reduce((sum, weight) => sum + weight, 0)).toBeCloseTo(1, 9);
        expect(absorbance[0]).toBeCloseTo(
          weights.reduce((sum, weight, i) => sum + weight * Math.sin(i), 0),
          9,
        );
        expect(1 / points[0]!).toBeCloseTo(
          weights.reduce((sum, weight) => sum + weight ** 2, 0),
          9,
        );
      }),
    );
  });
});

describe('against exact means', () => {
  // Mean of a Gaussian band A exp(−(x − m)²/2s²) over a window by Simpson's rule on 2000 intervals, which is exact to rounding here.
  const band = (nm: number): number => 0.8 * Math.exp(-((nm - 605) ** 2) / (2 * 40 ** 2));
  const exactMean = (centre: number, w: number): number => {
    const n = 2000;
    let sum = 0;
    for (let i = 0; i <= n; i++)
      sum += band(centre - w / 2 + (w * i) / n) * (i === 0 || i === n ? 1 : i % 2 === 1 ? 4 : 2);
    return sum / (3 * n);
  };

  // Over its stretch of length h a straight line misses by u²/2 of the second derivative (here 0.8/40² at most) at a distance u: h²/24 in
  // the mean of a whole stretch, up to h²/8 at its edges, which count where a window ends in the middle of a stretch.
  const pitchError = (pitch: number): number => ((pitch ** 2 / 24) * 0.8) / 40 ** 2;
  const target = Float64Array.from(range(500, 700, 5));
  const worst = (found: (nm: number, i: number) => number): number =>
    Math.max(...target.map((nm, i) => Math.abs(found(nm, i) - exactMean(nm, 5))));

  test.each([0.19, 1, 2, 3, 4])('a band of 94 nm width at a pitch of %s nm', (pitch) => {
    const { absorbance } = resample(spectrumOf(range(450, 760, pitch), band), target, 5);
    expect(worst((_, i) => absorbance[i]!)).toBeLessThan(1.5 * pitchError(pitch));
  });

  test('the plain mean of the points inside a window would be off by the slope times up to half a pitch', () => {
    const axis = range(450, 760, 4);
    const plain = (nm: number): number => {
      const inside = axis.filter((x) => x >= nm - 2.5 && x < nm + 2.5);
      return inside.reduce((sum, x) => sum + band(x), 0) / inside.length;
    };
    expect(worst(plain)).toBeGreaterThan(0.01);
  });
});

describe('points without a value', () => {
  const axis = range(400, 420, 1);
  const holed = spectrumOf(axis, (nm) => (nm === 410 ? NaN : 0.5));

  test('a window that needs one has none; others do not mind', () => {
    const target = Float64Array.of(402.5, 407.5, 412.5, 417.5);
    const means = (width: number): number[] =>
      [...resample(holed, target, width).absorbance].map((value) => Number(value.toFixed(12)));
    expect(means(4)).toEqual([0.5, 0.5, 0.5, 0.5]);
    expect(means(6)).toEqual([0.5, NaN, NaN, 0.5]);
    expect(resample(holed, target, 6).points[1]).toBeNaN();
  });

  test('at the ends the window shrinks about its centre', () => {
    const step = spectrumOf(axis, (nm) => (nm < 402 ? 0 : 1));
    // At 400 only the first point's own stretch is left, at 401 three of them.
    expect([...resample(step, Float64Array.of(400, 401, 402), 5).absorbance].map((a) => Number(a.toFixed(9)))).toEqual(
      [0, 1 / 3, 0.6].map((a) => Number(a.toFixed(9))),
    );
  });
});
