import { assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { designCuvette, RangeSolver, type Cuvette } from '../../src/bench/planning/cuvetteDesign.ts';
import { measurementBudget, repeatsFor, uncertaintyAfter } from '../../src/bench/planning/measurementBudget.ts';
import type { MeasurementModel } from '../../src/bench/planning/measurementModel.ts';
import {
  DEFAULT_WISH,
  marketCell,
  MARKET_PATHS,
  planMeasurement,
  type CellAtHand,
  type DilutionAtHand,
  type ExpectedSample,
} from '../../src/bench/planning/planMeasurement.ts';
import { amountsOf } from '../../src/electrolyte/forwardModel.ts';
import { namedModes } from '../../src/estimation/namedModes.ts';
import { prepare } from '../../src/estimation/prepare.ts';
import { reduce, solve } from '../../src/estimation/solve.ts';
import { normalDeviates } from '../instrument/simulated.ts';
import { processorSeconds } from '../support/processorTime.ts';
import { PHOTOMETER, publishedModel, publishedPairModel } from './publishedModel.ts';

const UNDILUTED: DilutionAtHand = { factor: 1, uncertainty: 0, glassware: '' };
const diluted = (factor: number): DilutionAtHand => ({ factor, uncertainty: 0.003, glassware: 'flask' });
const POSITIVE: ExpectedSample = { side: 'positive', totalVanadium: 1.6, stateOfCharge: 0.5 };
const NEGATIVE: ExpectedSample = { side: 'negative', totalVanadium: 1.6, stateOfCharge: 0.5 };

const cuvette = (lower: number, higher: number, pathLength: number): Cuvette => ({
  lower,
  higher,
  pathLength,
  pathUncertainty: 0.01,
  fillingScatter: 0,
});

describe('information', () => {
  // Shot noise: relative error ∝ 10^(A/2)/A, least at A = 2/ln 10 = 0.8686 (any text on instrumental analysis).
  test('shot noise alone: the best path gives an absorbance of 0.87', () => {
    const half = Float64Array.from({ length: 40 }, (_, i) => (i < 20 ? 1 : 0));
    const model: MeasurementModel = {
      ...publishedModel('V2/V3'),
      wavelength: Float64Array.from(half.keys(), (i) => 500 + i),
      spectra: [half, half.map((x) => 1 - x)],
      amounts: amountsOf('V2/V3', []),
      boundLower: [],
      noise: 0,
    };
    const none = { offset: 0, slope: 0, scatter: 0, wavelengthShift: 0 };
    const shotOnly = { ...PHOTOMETER, noise: { constant: 0, shot: 0.001 }, strayLight: 0, priors: none, ceiling: 5 };
    const u = (absorbance: number) => {
      const exact = { ...cuvette(1, 1, absorbance), pathUncertainty: 0 };
      return uncertaintyAfter(measurementBudget(model, designCuvette(model, exact, shotOnly), exact, 0)!, 1)
        .totalVanadium;
    };
    const absorbances = Array.from({ length: 300 }, (_, i) => 0.005 * (i + 1));
    const best = absorbances.reduce((a, b) => (u(b) < u(a) ? b : a));
    expect(best).toBeCloseTo(2 / Math.LN10, 2);
    expect(u(0.5) / u(best)).toBeCloseTo(10 ** 0.25 / 0.5 / (10 ** (best / 2) / best), 9);
  });

  test('ranges of wavelengths by running sums agree with the whole budget', () => {
    const model = publishedModel('V4/V5');
    const inCell = cuvette(0.8, 0.8, 0.02);
    const design = designCuvette(model, inCell, PHOTOMETER);
    const whole = new RangeSolver(design, 0.8, 0.8).solve(0, model.wavelength.length)!;
    const budget = uncertaintyAfter(measurementBudget(model, design, inCell, 0)!, 1);
    expect(Math.sqrt(whole.share)).toBeCloseTo(budget.stateOfCharge, 12);
    expect(Math.sqrt(whole.total)).toBeCloseTo(budget.totalVanadium, 12);
  });

  test('a shorter range never says more', () => {
    const model = publishedModel('V2/V3');
    const solver = new RangeSolver(designCuvette(model, cuvette(0.8, 0.8, 0.1), PHOTOMETER), 0.8, 0.8);
    const count = model.wavelength.length;
    for (let start = 0; start < count - 10; start += 7)
      for (let end = start + 10; end < count; end += 7) {
        const narrow = solver.solve(start, end)?.share ?? Infinity;
        expect(solver.solve(Math.max(0, start - 7), end)!.share).toBeLessThanOrEqual(narrow * (1 + 1e-9));
      }
  });

  test('more noise, offset or stray light never gives a smaller uncertainty', () => {
    const model = publishedModel('V4/V5');
    const inCell = cuvette(0.8, 0.8, 0.02);
    const u = (photometer: typeof PHOTOMETER) =>
      uncertaintyAfter(measurementBudget(model, designCuvette(model, inCell, photometer), inCell, 0)!, 1).stateOfCharge;
    const factor = double({ min: 1, max: 20, noNaN: true });
    assert(
      property(factor, factor, factor, (noise, offset, stray) => {
        const worse = {
          ...PHOTOMETER,
          noise: { constant: 0.0005 * noise, shot: 0.0002 },
          strayLight: 0.0005 * stray,
          priors: { ...PHOTOMETER.priors, offset: 0.002 * offset },
        };
        expect(u(worse)).toBeGreaterThanOrEqual(u(PHOTOMETER) * (1 - 1e-9));
      }),
      { numRuns: 60 },
    );
  });

  // The plan promises what the estimator delivers: 400 simulated spectra with the noise and the modes of the plan, solved as an
  // assay solves them. The standard deviation of 400 results is itself known to 3.5 %.
  test.each([
    ['V2/V3', 0.1],
    ['V4/V5', 0.02],
  ] as const)('%s in %s cm: simulated assays scatter by what was planned', (pair, pathLength) => {
    const model = publishedModel(pair);
    const pairModel = publishedPairModel(pair);
    const photometer = { ...PHOTOMETER, strayLight: 0, noise: { constant: 0, shot: 0 }, ceiling: 9 };
    const inCell = cuvette(0.9, 0.7, pathLength);
    const design = designCuvette(model, inCell, photometer);
    const planned = uncertaintyAfter(measurementBudget(model, design, inCell, 0)!, 1).stateOfCharge;
    const prepared = prepare(pairModel, namedModes(pairModel.wavelength, photometer.priors));
    const draw = normalDeviates(17);
    const errors = Array.from({ length: 400 }, () => {
      const absorbance = design.absorbance.map((A) => A + model.noise * draw());
      for (const { shape } of design.disturbances) {
        const amplitude = draw();
        shape.forEach((value, i) => (absorbance[i]! += amplitude * value));
      }
      const { lower, higher } = solve(prepared, reduce(prepared, absorbance), {
        pathLength,
        pathUncertainty: 0.01,
        wavelengthUncertainty: 0.3,
      });
      return higher / (lower + higher) - 0.7 / 1.6;
    });
    const scatter = Math.sqrt(errors.reduce((sum, e) => sum + e * e, 0) / errors.length);
    expect(Math.abs(scatter / planned - 1)).toBeLessThan(0.11);
  });
});

describe('repeats', () => {
  const line = (isRandom: boolean, stateOfCharge: number) => ({
    source: '',
    isRandom,
    stateOfCharge,
    totalVanadium: 0,
  });

  test('only what a filling draws anew averages away', () => {
    const lines = [line(true, 0.02), line(false, 0.005)];
    expect(uncertaintyAfter(lines, 4).stateOfCharge).toBeCloseTo(Math.hypot(0.01, 0.005), 12);
    // 0.02²/(0.01² − 0.005²) = 5.33
    expect(repeatsFor(lines, 0.01)).toBe(6);
    expect(repeatsFor(lines, 0.005)).toBeNull();
    expect(repeatsFor(lines, 0.03)).toBe(1);
  });
});

describe('plan', () => {
  const drawer = MARKET_PATHS.map(marketCell);
  const dilutions = [UNDILUTED, ...[2, 5, 10, 20, 50, 100].map(diluted)];

  // Common practice: 1 mm for the negative, 0.1 to 0.2 mm for the positive undiluted, 10 mm for it at 1:20.
  test('the negative goes undiluted into about 1 mm', () => {
    const plan = planMeasurement(publishedModel('V2/V3'), NEGATIVE, PHOTOMETER, drawer, [UNDILUTED]);
    expect(plan.advice!.pathLength).toBeGreaterThanOrEqual(0.05);
    expect(plan.advice!.pathLength).toBeLessThanOrEqual(0.2);
    expect(plan.candidates.find(({ pathLength }) => pathLength === 1)!.grade).toBe('dark');
  });

  test('the positive undiluted goes into the thinnest cells; 1 mm is dark', () => {
    const plan = planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, drawer, [UNDILUTED]);
    expect(plan.advice!.pathLength).toBeLessThanOrEqual(0.02);
    const thick = plan.candidates.find(({ pathLength }) => pathLength === 0.1)!;
    expect(thick.grade).toBe('dark');
    // practice: 58 per cm at 764 nm, 50:50, 1.6 mol/L.
    expect(thick.largestAbsorbance).toBeGreaterThan(5);
  });

  test('every cell with every dilution is on the map', () => {
    const plan = planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, drawer, dilutions);
    expect(plan.candidates).toHaveLength(7 * 7);
    expect(new Set(plan.candidates.map((c) => `${c.cell} ${c.dilution}`)).size).toBe(49);
  });

  // Bound share of V(IV), 50:50, K = 0.9: at 1.6 mol/L and at 0.08 mol/L by the quadratic of the mass action.
  test('dilution breaks the complex, and the plan says by how much', () => {
    const bound = (c: number) => {
      const half = c / 2;
      const s = 2 * half + 1 / 0.9;
      return (s - Math.sqrt(s * s - 4 * half * half)) / 2 / half;
    };
    const plan = planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, [marketCell(1)], [diluted(20)]);
    expect(plan.candidates[0]!.bound.tank).toBeCloseTo(bound(1.6), 9);
    expect(plan.candidates[0]!.bound.cuvette).toBeCloseTo(bound(0.08), 9);
    expect(plan.findings.map(({ code }) => code)).toContain('complex-dissociates');
  });

  test('a concentration that was calibrated comes before one that was not, at the same grade', () => {
    const model = { ...publishedModel('V4/V5'), standardTotals: [0.9, 1.83] as const };
    const cells = [marketCell(0.02), marketCell(1)];
    const plan = planMeasurement(model, POSITIVE, PHOTOMETER, cells, [UNDILUTED, diluted(20)]);
    expect(plan.advice).toMatchObject({ pathLength: 0.02, dilution: 1, isAmongStandards: true });
    const thick = planMeasurement(model, POSITIVE, PHOTOMETER, [marketCell(1)], [UNDILUTED, diluted(20)]);
    expect(thick.advice).toMatchObject({ dilution: 20, isAmongStandards: false, cuvetteTotal: 0.08 });
    expect(thick.findings.map(({ code }) => code)).toContain('outside-calibration');
  });

  test('a drawer without a usable cell: said, with what to buy', () => {
    const plan = planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, [marketCell(1)], [UNDILUTED]);
    expect(plan.advice).toBeNull();
    expect(plan.findings[0]).toMatchObject({ code: 'no-usable-cell', severity: 'withhold' });
    expect(plan.findings[0]!.hint).toMatch(/a 0\.[12] mm cell at dilution 1 would give/);
    expect(plan.wouldHelp[0]!.pathLength).toBeLessThanOrEqual(0.02);
  });

  test('a wish beyond reach names the cause that repeats cannot mend', () => {
    const wish = { ...DEFAULT_WISH, stateOfCharge: 0.0001 };
    const plan = planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, drawer, dilutions, wish);
    expect(plan.findings[0]!.code).toBe('wish-out-of-reach');
    expect(plan.advice!.fillings).toBeNull();
  });

  test('a wish between one filling and endless fillings is reached by so many fillings as it takes', () => {
    const model = publishedModel('V4/V5');
    const planFor = (wish: number) =>
      planMeasurement(model, POSITIVE, PHOTOMETER, [marketCell(0.01)], [UNDILUTED], {
        stateOfCharge: wish,
        mostFillings: 20,
      }).candidates[0]!;
    const { budget, uncertainty } = planFor(1);
    const single = uncertainty!.stateOfCharge;
    const floor = uncertaintyAfter(budget, 1e9).stateOfCharge;
    const three = planFor(Math.sqrt(floor ** 2 + (single ** 2 - floor ** 2) / 3));
    expect([three.grade, three.fillings]).toEqual(['repeat', 3]);
    expect(planFor(single * 1.001).grade).toBe('good');
    expect(planFor(floor * 0.999).grade).toBe('short');
  });

  test('the range it calls sufficient costs no more than a tenth', () => {
    const model = publishedModel('V4/V5');
    const plan = planMeasurement(model, POSITIVE, PHOTOMETER, [marketCell(0.02)], [UNDILUTED]);
    const [from, to] = plan.candidates[0]!.sufficientRange!;
    const inCell = { ...marketCell(0.02), lower: 0.8, higher: 0.8 };
    const solver = new RangeSolver(designCuvette(model, inCell, PHOTOMETER), 0.8, 0.8);
    const index = (nm: number) => model.wavelength.indexOf(nm);
    const whole = solver.solve(0, model.wavelength.length)!.share;
    expect(Math.sqrt(solver.solve(index(from), index(to) + 1)!.share / whole)).toBeLessThanOrEqual(1.1);
    // Every range shorter by a step costs more.
    for (let start = 0; index(from) - start >= -5 && start + index(to) - index(from) < model.wavelength.length; start++)
      expect(
        Math.sqrt((solver.solve(start, start + index(to) - index(from))?.share ?? Infinity) / whole),
      ).toBeGreaterThan(1.1);
  });

  test.each([
    ['no-cells', [], [UNDILUTED], POSITIVE, DEFAULT_WISH],
    ['no-dilutions', drawer, [], POSITIVE, DEFAULT_WISH],
    ['dilution-impossible', drawer, [{ ...UNDILUTED, factor: 0.5 }], POSITIVE, DEFAULT_WISH],
    ['path-impossible', [{ ...marketCell(1), pathLength: 0 }], [UNDILUTED], POSITIVE, DEFAULT_WISH],
    ['sample-impossible', drawer, [UNDILUTED], { ...POSITIVE, totalVanadium: 0 }, DEFAULT_WISH],
    ['sample-impossible', drawer, [UNDILUTED], { ...POSITIVE, stateOfCharge: 1.2 }, DEFAULT_WISH],
    ['pair-differs', drawer, [UNDILUTED], NEGATIVE, DEFAULT_WISH],
    ['wish-impossible', drawer, [UNDILUTED], POSITIVE, { stateOfCharge: 0, mostFillings: 1 }],
  ] as [string, CellAtHand[], DilutionAtHand[], ExpectedSample, typeof DEFAULT_WISH][])(
    '%s is refused',
    (code, cells, dilutions, sample, wish) => {
      expect(() => planMeasurement(publishedModel('V4/V5'), sample, PHOTOMETER, cells, dilutions, wish)).toThrow(
        expect.objectContaining({ code }),
      );
    },
  );

  test('all wavelengths, 8 paths, 30 dilutions take less than a second', () => {
    const eight = [...MARKET_PATHS, 0.03].map(marketCell);
    const thirty = Array.from({ length: 30 }, (_, i) => diluted(1 + 3 * i));
    const seconds = processorSeconds(() =>
      planMeasurement(publishedModel('V4/V5'), POSITIVE, PHOTOMETER, eight, thirty),
    );
    expect(seconds).toBeLessThan(1);
  });
});
