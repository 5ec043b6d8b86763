import { expect, test } from 'vitest';
import { instrumentConsequences } from '../../src/bench/instrument/consequence.ts';
import { verifyInstrument } from '../../src/bench/instrument/verifyInstrument.ts';
import { designCuvette } from '../../src/bench/planning/cuvetteDesign.ts';
import { disturbanceEffect } from '../../src/bench/planning/disturbanceEffect.ts';
import { DEFAULT_MODE_PRIORS, namedModes } from '../../src/estimation/namedModes.ts';
import { prepare } from '../../src/estimation/prepare.ts';
import { reduce, solve } from '../../src/estimation/solve.ts';
import { PHOTOMETER, publishedModel, publishedPairModel } from '../planning/publishedModel.ts';
import { normalDeviates, scan } from './simulated.ts';

const blank = { test: 'blank', minutes: 0, spectrum: scan('blank', 400, 900, 1, () => 0) } as const;
const models = [publishedModel('V2/V3'), publishedModel('V4/V5'), publishedModel('V3/V4')];
const record = {
  ...verifyInstrument([blank]),
  noise: { constant: 0.0003, shot: null, step: 1 },
  wavelengthShift: { value: 0.4, uncertainty: 0.1 },
  strayLight: { value: 0.001, uncertainty: 0.0001, nm: 355 },
};

test('three usual samples, the largest cause first', () => {
  const consequences = instrumentConsequences(record, models);
  expect(consequences.map(({ sample }) => sample)).toEqual([
    'negative, 50 %, 1.6 mol/L, 1 mm',
    'positive, 50 %, 1.6 mol/L, 0.1 mm',
    'composite, 50 %, 1.6 mol/L, 0.5 mm',
  ]);
  for (const { lines } of consequences) {
    expect(lines.map(({ source }) => source).sort()).toEqual(['noise', 'stray light', 'wavelength axis']);
    const sizes = lines.map(({ stateOfCharge }) => stateOfCharge);
    expect(sizes).toEqual([...sizes].sort((a, b) => b - a));
  }
});

test('what was not measured has no consequence', () => {
  const none = { ...record, wavelengthShift: null, strayLight: null, noise: null };
  expect(instrumentConsequences(none, models).flatMap(({ lines }) => lines)).toEqual([]);
  expect(instrumentConsequences(record, []).length).toBe(0);
});

test('stray light of the record acts by its law, below the ceiling only', () => {
  const model = publishedModel('V4/V5');
  const cuvette = { lower: 0.8, higher: 0.8, pathLength: 0.01, pathUncertainty: 0, fillingScatter: 0 };
  const unaware = {
    noise: { constant: 0, shot: 0 },
    pointsAveraged: 1,
    strayLight: 0,
    priors: DEFAULT_MODE_PRIORS,
  };
  const design = designCuvette(model, cuvette, { ...unaware, ceiling: 2 });
  const shape = design.absorbance.map((A) => -Math.log10((10 ** -A + 0.001) / 1.001) - A);
  const expected = Math.abs(disturbanceEffect(design, 0.8, 0.8, shape)!.share);
  const positive = instrumentConsequences(record, [model])[0]!;
  expect(positive.lines.find(({ source }) => source === 'stray light')!.stateOfCharge).toBeCloseTo(expected, 12);

  const dark = designCuvette(model, { ...cuvette, pathLength: 0.05 }, { ...unaware, ceiling: 2 });
  const inTheDark = dark.absorbance.map((A) => (A > 2 ? 1 : 0));
  expect(inTheDark.some((value) => value === 1)).toBe(true);
  expect(disturbanceEffect(dark, 0.8, 0.8, inTheDark)).toEqual({ share: 0, total: 0 });
});

// 300 simulated estimates with the photometer's noise alone; their standard deviation is itself known to 4 %.
test('noise of the record is the scatter it causes', () => {
  const pairModel = publishedPairModel('V2/V3');
  const cuvette = { lower: 0.8, higher: 0.8, pathLength: 0.1, pathUncertainty: 0, fillingScatter: 0 };
  const { absorbance } = designCuvette(publishedModel('V2/V3'), cuvette, PHOTOMETER);
  const prepared = prepare(pairModel, namedModes(pairModel.wavelength, DEFAULT_MODE_PRIORS));
  const draw = normalDeviates(31);
  // Points 1 nm apart, means of five: 0.0003/√5.
  const errors = Array.from({ length: 300 }, () => {
    const measured = absorbance.map((A) => A + (0.0003 / Math.sqrt(5)) * draw());
    const { lower, higher } = solve(prepared, reduce(prepared, measured), {
      pathLength: 0.1,
      pathUncertainty: 0,
      wavelengthUncertainty: DEFAULT_MODE_PRIORS.wavelengthShift,
    });
    return higher / (lower + higher) - 0.5;
  });
  const scatter = Math.sqrt(errors.reduce((sum, error) => sum + error * error, 0) / errors.length);
  const negative = instrumentConsequences(record, models)[0]!;
  const stated = negative.lines.find(({ source }) => source === 'noise')!.stateOfCharge;
  expect(Math.abs(scatter / stated - 1)).toBeLessThan(0.12);
});

// The stated effect is what the estimate itself does when its spectrum is spoiled so.
test.each([
  ['V2/V3', 0.1],
  ['V4/V5', 0.01],
] as const)('%s in %s cm: stray light of 0.1 %% moves a real estimate by what is stated', (pair, pathLength) => {
  const model = publishedModel(pair);
  const cuvette = { lower: 0.8, higher: 0.8, pathLength, pathUncertainty: 0, fillingScatter: 0 };
  const design = designCuvette(model, cuvette, {
    noise: { constant: 0, shot: 0 },
    pointsAveraged: 1,
    strayLight: 0,
    priors: DEFAULT_MODE_PRIORS,
    ceiling: 9,
  });
  const spoiled = design.absorbance.map((A) => -Math.log10((10 ** -A + 0.001) / 1.001));
  const stated = disturbanceEffect(
    design,
    0.8,
    0.8,
    spoiled.map((A, i) => A - design.absorbance[i]!),
  )!;
  const pairModel = publishedPairModel(pair);
  const prepared = prepare(pairModel, namedModes(pairModel.wavelength, DEFAULT_MODE_PRIORS));
  const { lower, higher } = solve(prepared, reduce(prepared, spoiled), {
    pathLength,
    pathUncertainty: 0,
    wavelengthUncertainty: DEFAULT_MODE_PRIORS.wavelengthShift,
  });
  const moved = higher / (lower + higher) - 0.5;
  expect(Math.abs(moved)).toBeGreaterThan(1e-5);
  expect(Math.abs(stated.share / moved - 1)).toBeLessThan(0.05);
  expect(stated.total / ((lower + higher) / 1.6 - 1)).toBeCloseTo(1, 1);
});
