import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { parseCalibration, resample, seededRandom, simulateSpectrum } from '../../src/index.ts';
import { NO_FAULTS, reading } from '../../src/estimation/simulateFaults.ts';

const reference = parseCalibration(readFileSync('calibration/reference.json', 'utf8'), 'reference.json');
const nativeAxis = Float64Array.from({ length: 521 }, (_, i) => 430 + i);

test('a fine axis averaged back gives the calibration’s own absorbance to rounding', () => {
  const request = { name: 'a', concentration: { V4: 0.7, V5: 0.9 }, pathLength: 0.02 };
  const coarse = simulateSpectrum(reference, request, seededRandom(1));
  const fine = simulateSpectrum(reference, { ...request, wavelength: nativeAxis }, seededRandom(1));
  const back = resample(fine, coarse.wavelength, 5).absorbance;
  // The outermost bins are half outside the fine axis.
  for (let i = 1; i < back.length - 1; i++) expect(back[i]).toBeCloseTo(coarse.absorbance[i]!, 12);
});

test('diluting twenty-fold in a cell twenty times as long changes only what the complex absorbs', () => {
  const concentration = { V4: 0.8, V5: 0.8 };
  const thick = simulateSpectrum(reference, { name: 'a', concentration, pathLength: 0.02 }, seededRandom(1));
  const thin = simulateSpectrum(
    reference,
    { name: 'b', concentration, pathLength: 0.4, dilution: 20 },
    seededRandom(1),
  );
  const negative = { name: 'c', concentration: { V2: 0.8, V3: 0.8 }, pathLength: 0.1 };
  const neat = simulateSpectrum(reference, negative, seededRandom(1));
  const diluted = simulateSpectrum(reference, { ...negative, pathLength: 2, dilution: 20 }, seededRandom(1));
  neat.absorbance.forEach((value, i) => expect(diluted.absorbance[i]).toBeCloseTo(value, 12));
  const at600 = thick.wavelength.indexOf(600);
  expect(thin.absorbance[at600]!).toBeLessThan(0.5 * thick.absorbance[at600]!);
});

// Any instrumental analysis text: with 0.1 % stray light a true absorbance of 2 reads 1.959, one of 3 reads 2.70.
test.each([
  [2, 1.959, 3],
  [3, 2.7, 2],
])('0.1 %% stray light shows %s as %s', (truth, shown, digits) => {
  expect(reading(truth, 600, { ...NO_FAULTS, strayLight: 0.001 }, 600, 1)).toBeCloseTo(shown, digits);
});

// 4 × 0.2095 / 24.465 L = 34.25 mmol of V(II) for each litre of air.
test('a volume of air takes 34.25 mmol of V(II) from a litre', () => {
  const request = { name: 'a', concentration: { V2: 1, V3: 0.6 }, pathLength: 0.1 };
  const exposed = simulateSpectrum(reference, { ...request, faults: { airExposure: 1 } }, seededRandom(1));
  const same = simulateSpectrum(
    reference,
    { ...request, concentration: { V2: 1 - 0.03425, V3: 0.6 + 0.03425 } },
    seededRandom(1),
  );
  exposed.absorbance.forEach((value, i) => expect(value).toBeCloseTo(same.absorbance[i]!, 5));
});

test('the same seed gives the same spectrum, another seed another; scatter is what was asked for', () => {
  const request = { name: 'a', concentration: { V2: 1, V3: 0.6 }, pathLength: 0.1, noise: { constant: 0.001 } };
  const draw = (seed: number) => simulateSpectrum(reference, request, seededRandom(seed)).absorbance;
  expect(draw(7)).toEqual(draw(7));
  expect(draw(7)).not.toEqual(draw(8));
  const quiet = simulateSpectrum(reference, { ...request, noise: {} }, seededRandom(0)).absorbance;
  let sum = 0;
  for (let seed = 0; seed < 100; seed++) draw(seed).forEach((value, i) => (sum += (value - quiet[i]!) ** 2));
  // 10,500 draws: the standard deviation is known to 0.7 %; 3 % is four of those.
  expect(Math.abs(Math.sqrt(sum / (100 * quiet.length)) / 0.001 - 1)).toBeLessThan(0.03);
});

test('with a shift the reading at λ is the true value at λ − shift', () => {
  const request = { name: 'a', concentration: { V3: 1, V4: 0.6 }, pathLength: 0.1, wavelength: nativeAxis };
  const straight = simulateSpectrum(reference, request, seededRandom(1)).absorbance;
  const shifted = simulateSpectrum(
    reference,
    { ...request, faults: { wavelengthShift: 2 } },
    seededRandom(1),
  ).absorbance;
  for (let i = 10; i < 500; i++) expect(shifted[i]).toBeCloseTo(straight[i - 2]!, 10);
});

test('light beside the sample never darkens and never reads above its own ceiling', () => {
  fc.assert(
    fc.property(
      fc.double({ min: 0, max: 5, noNaN: true }),
      fc.double({ min: 1e-6, max: 0.5, noNaN: true }),
      (absorbance, bubble) => {
        const seen = reading(absorbance, 700, { ...NO_FAULTS, bubble }, 700, 1);
        expect(seen).toBeLessThanOrEqual(absorbance + 1e-12);
        expect(seen).toBeLessThanOrEqual(-Math.log10(bubble) + 1e-12);
      },
    ),
  );
});

describe('refusals', () => {
  const good = { name: 'a', concentration: { V2: 0.8, V3: 0.8 }, pathLength: 0.1 };
  test.each([
    [{ concentration: { V2: 0.8, V4: 0.8 } }, 'cannot-coexist', 'concentration'],
    [{ concentration: {} }, 'no-vanadium', 'concentration'],
    [{ concentration: { V2: -0.1, V3: 1 } }, 'out-of-range', 'concentration.V2'],
    [{ concentration: { V2: NaN, V3: 1 } }, 'out-of-range', 'concentration.V2'],
    [{ pathLength: 0 }, 'out-of-range', 'pathLength'],
    [{ dilution: 0.5 }, 'out-of-range', 'dilution'],
    [{ wavelength: Float64Array.of(300, 400, 500) }, 'axis-outside', 'wavelength'],
    [{ faults: { bubble: 1.2 } }, 'out-of-range', 'faults.bubble'],
    [{ faults: { offset: NaN } }, 'out-of-range', 'faults.offset'],
  ])('%j is refused as %s', (change, code, where) => {
    expect(() => simulateSpectrum(reference, { ...good, ...change }, seededRandom(1))).toThrow(
      expect.objectContaining({ code, where }),
    );
  });

  test('a pair that the calibration lacks', () => {
    const few = { pairs: reference.pairs.filter((pair) => pair.pair !== 'V4/V5') };
    expect(() => simulateSpectrum(few, { ...good, concentration: { V4: 0.5, V5: 0.5 } }, seededRandom(1))).toThrow(
      expect.objectContaining({ code: 'not-calibrated' }),
    );
  });
});
