import { describe, expect, test } from 'vitest';
import { seededRandom } from '../../src/numerics/random.ts';
import { subtractBlank } from '../../src/spectrum/blank.ts';
import { readingNoise } from '../../src/spectrum/noise.ts';
import { makeSpectrum, type Spectrum } from '../../src/spectrum/spectrum.ts';

const spectrumOf = (from: number, to: number, step: number, absorbanceAt: (nm: number) => number): Spectrum => {
  const wavelength = Float64Array.from({ length: Math.round((to - from) / step) + 1 }, (_, i) => from + i * step);
  return makeSpectrum('s', wavelength, wavelength.map(absorbanceAt));
};

describe('blank', () => {
  const acid = (nm: number): number => 0.02 + (nm - 600) * 1e-4;
  const sample = spectrumOf(400, 900, 1, (nm) => 0.5 + acid(nm));

  test.each([
    ['on the same axis', spectrumOf(400, 900, 1, acid)],
    ['on a finer axis', spectrumOf(390, 910, 0.3, acid)],
    ['on a coarser axis', spectrumOf(380, 920, 7, acid)],
  ])('%s', (_, blank) => {
    const { spectrum, lost } = subtractBlank(sample, blank);
    for (const value of spectrum.absorbance) expect(value).toBeCloseTo(0.5, 12);
    expect(lost).toBe(0);
    expect(spectrum.wavelength).toBe(sample.wavelength);
  });

  test('where the blank does not reach there is no value, and that is counted', () => {
    const { spectrum, lost } = subtractBlank(sample, spectrumOf(450, 850, 1, acid));
    expect(lost).toBe(100);
    expect(spectrum.absorbance.filter(Number.isNaN)).toHaveLength(100);
    expect(spectrum.absorbance[50]).toBeCloseTo(0.5, 12);
  });

  test('a blank over another range is refused', () => {
    expect(() => subtractBlank(sample, spectrumOf(1000, 1100, 1, acid))).toThrow(
      expect.objectContaining({ code: 'blank-apart' }),
    );
  });
});

describe('noise of a reading', () => {
  const band = (nm: number): number => 1.2 * Math.exp(-((nm - 765) ** 2) / (2 * 45 ** 2));

  test.each([0.0002, 0.002])('%s on a smooth band is found within 5 %%, spikes and steps notwithstanding', (sigma) => {
    const random = seededRandom(7);
    const noisy = spectrumOf(
      430,
      950,
      0.2,
      (nm) => band(nm) + sigma * random.normal() + (Math.abs(nm - 656) < 0.15 ? 0.3 : 0),
    );
    expect(readingNoise(noisy) / sigma).toBeGreaterThan(0.95);
    expect(readingNoise(noisy) / sigma).toBeLessThan(1.05);
  });

  test('an uneven axis changes nothing', () => {
    const random = seededRandom(3);
    const wavelength = Float64Array.from({ length: 3000 }, (_, i) => 430 + i * 0.17 + 0.05 * Math.sin(i * 1.7));
    const noisy = makeSpectrum(
      's',
      wavelength,
      wavelength.map((nm) => band(nm) + 0.001 * random.normal()),
    );
    expect(readingNoise(noisy)).toBeCloseTo(0.001, 4);
  });

  test('a range counts only what lies in it, and too little is refused', () => {
    const random = seededRandom(5);
    const noisy = spectrumOf(400, 800, 0.5, (nm) => (nm < 600 ? 0.01 : 0.001) * random.normal());
    expect(readingNoise(noisy, 400, 599)).toBeGreaterThan(0.009);
    expect(readingNoise(noisy, 600, 800)).toBeLessThan(0.0011);
    expect(() => readingNoise(noisy, 500, 503)).toThrow(expect.objectContaining({ code: 'points-missing' }));
  });
});
