import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { afterEach, describe, expect, test, vi } from 'vitest';
import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import { calibrationLeverage, concentrationCovariance, shareAndTotal } from '../../src/estimation/uncertainty.ts';
import { assumedPathUncertainty } from '../../src/estimation/cuvette.ts';
import { DEFAULT_MODE_PRIORS, namedModes } from '../../src/estimation/namedModes.ts';
import { WANTED } from '../../src/estimation/fastRows.ts';
import { axisMap } from '../../src/estimation/kernelAxis.ts';
import { rowSolver } from '../../src/estimation/rowSolver.ts';
import { prepare as prepareModel } from '../../src/estimation/prepare.ts';
import { reduce, solve } from '../../src/estimation/solve.ts';
import {
  parseCalibration,
  prepare,
  resample,
  seededRandom,
  simulateSpectrum,
  speciesOfPair,
  PAIR_OF_SIDE,
  type Pair,
  type Side,
  type Spectrum,
} from '../../src/index.ts';
import type { PairsOnGrid } from '../../src/estimation/solveMany.ts';
import { inventedAbsorbance, inventedModel } from '../support/inventedModel.ts';
import { sharedSpectraPresent, sharedStandards } from '../support/sharedSpectra.ts';

const reference = parseCalibration(readFileSync('calibration/reference.json', 'utf8'), 'reference.json');
const axis350 = Float64Array.from({ length: 350 }, (_, i) => 430 + (520 * i) / 349);

interface Expected {
  readonly stateOfCharge: number;
  readonly uncertainty: number;
  readonly total: number;
  readonly totalUncertainty: number;
  readonly chiSquare: number;
}

/** The same numbers by `solve`, one spectrum at a time. */
function byReference(calibration: PairsOnGrid, pair: Pair, spectrum: Spectrum, pathLength: number): Expected {
  const { model, betweenGroup } = calibration.pairs.find((one) => one.pair === pair)!;
  const curve = resample(spectrum, model.wavelength, calibration.grid.step).absorbance;
  const prepared = prepareModel(
    model,
    namedModes(model.wavelength, DEFAULT_MODE_PRIORS),
    Array.from(curve, (value) => !Number.isNaN(value)),
  );
  const solution = solve(
    prepared,
    reduce(
      prepared,
      Float64Array.from(prepared.used, (i) => curve[i]!),
    ),
    {
      pathLength,
      pathUncertainty: assumedPathUncertainty(pathLength),
      wavelengthUncertainty: DEFAULT_MODE_PRIORS.wavelengthShift,
    },
  );
  expect(calibrationLeverage(prepared, solution, pathLength)).toBeGreaterThanOrEqual(0);
  const found = shareAndTotal(solution.lower, solution.higher, concentrationCovariance(prepared, solution, pathLength));
  return {
    stateOfCharge: pair === 'V2/V3' ? 1 - found.share : found.share,
    uncertainty: Math.hypot(found.shareUncertainty, betweenGroup.share),
    total: found.total,
    totalUncertainty: Math.hypot(found.totalUncertainty, betweenGroup.total * found.total),
    chiSquare: solution.chiSquare,
  };
}

function expectSame(calibration: PairsOnGrid, pair: Pair, spectrum: Spectrum, pathLength: number, dilution = 1): void {
  const expected = byReference(calibration, pair, spectrum, pathLength);
  const found = prepare(calibration, spectrum.wavelength, { pair, pathLength, dilution }).solveMany(
    spectrum.absorbance,
  );
  expect(Math.abs(found.stateOfCharge[0]! - expected.stateOfCharge)).toBeLessThan(1e-7);
  expect(Math.abs(found.totalVanadium[0]! / dilution / expected.total - 1)).toBeLessThan(1e-6);
  // Both take the matrix a last step, up to 1e-4 standard uncertainties, before the minimum.
  expect(Math.abs(found.uncertainty[0]! / expected.uncertainty - 1)).toBeLessThan(1e-4);
  expect(Math.abs(found.totalUncertainty[0]! / dilution / expected.totalUncertainty - 1)).toBeLessThan(1e-4);
  expect(Math.abs(found.chiSquare[0]! / expected.chiSquare - 1)).toBeLessThan(1e-5);
}

describe.skipIf(!sharedSpectraPresent)('published spectra', () => {
  test('99 real spectra: the kernel finds what the reference solver finds', () => {
    const all = sharedSpectraPresent ? sharedStandards() : [];
    expect(all).toHaveLength(99);
    for (const standard of all) {
      const pair: Pair = standard.name.startsWith('V2') ? 'V2/V3' : standard.name.startsWith('V4') ? 'V4/V5' : 'V3/V4';
      expectSame(reference, pair, standard.spectrum, standard.pathLength);
    }
  });
});

const composition = fc.record({
  pair: fc.constantFrom<Pair>('V2/V3', 'V3/V4', 'V4/V5'),
  share: fc.double({ min: 0, max: 1, noNaN: true }),
  total: fc.double({ min: 0.5, max: 2, noNaN: true }),
  seed: fc.nat(1_000_000),
});

const simulated = (
  { pair, share, total, seed }: { pair: Pair; share: number; total: number; seed: number },
  pathLength: number,
  dilution = 1,
  wavelength = axis350,
): Spectrum => {
  const [lower, higher] = speciesOfPair(pair);
  return simulateSpectrum(
    reference,
    {
      name: 'simulated',
      concentration: { [lower]: total * (1 - share), [higher]: total * share },
      pair,
      pathLength,
      dilution,
      wavelength,
      noise: { constant: 0.0005, filling: 0.02, pattern: 1 },
    },
    seededRandom(seed),
  );
};

test('simulated spectra, thin cell: the kernel finds what the reference solver finds', () => {
  fc.assert(
    fc.property(composition, (sample) => expectSame(reference, sample.pair, simulated(sample, 0.02), 0.02)),
    { numRuns: 150 },
  );
});

test('simulated spectra, diluted twenty-fold: the same, and the total is that of the tank', () => {
  fc.assert(
    fc.property(composition, (sample) => expectSame(reference, sample.pair, simulated(sample, 0.5, 20), 0.5, 20)),
    { numRuns: 100 },
  );
});

test('spoiled spectra, where one minimum is not enough: the same', () => {
  const spoiled = [{ offset: 0.1 }, { pathFactor: 2 }, { wavelengthShift: 3 }, { bubble: 0.05 }, { strayLight: 0.01 }];
  fc.assert(
    fc.property(composition, fc.constantFrom(...spoiled), ({ pair, share, total, seed }, faults) => {
      const [lower, higher] = speciesOfPair(pair);
      const concentration = { [lower]: total * (1 - share), [higher]: total * share };
      const spectrum = simulateSpectrum(
        reference,
        { name: 'spoiled', concentration, pair, pathLength: 0.02, faults, noise: { constant: 0.001 } },
        seededRandom(seed),
      );
      expectSame(reference, pair, spectrum, 0.02);
    }),
    { numRuns: 100 },
  );
});

const invented = (associations: ReturnType<typeof inventedModel>['associations']): PairsOnGrid => {
  const model = { ...inventedModel(), associations };
  return { grid: { step: 5 }, pairs: [{ pair: model.pair, model, betweenGroup: { share: 0.004, total: 0.01 } }] };
};

test.each([
  ['a one-to-one complex', [{ name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 1.1 }]],
  ['its weak limit', [{ name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 0 }]],
  ['a weak limit of the lower state', [{ name: '2V4', reactants: { V4: 2 }, associationConstant: 0 }]],
  ['a dimer, by the general solver', [{ name: '2V5', reactants: { V5: 2 }, associationConstant: 0.7 }]],
])('%s: the kernel finds the composition that made the spectrum', (_, associations) => {
  const calibration = invented(associations);
  const { model } = calibration.pairs[0]!;
  const many = prepare(calibration, model.wavelength, { pair: 'V4/V5', pathLength: 0.05, dilution: 2 });
  fc.assert(
    fc.property(
      fc.double({ min: 0.02, max: 0.98, noNaN: true }),
      fc.double({ min: 0.3, max: 2, noNaN: true }),
      (share, total) => {
        const absorbance = inventedAbsorbance(model, total * (1 - share), total * share, 0.05);
        const found = many.solveMany(absorbance);
        expect(found.stateOfCharge[0]).toBeCloseTo(share, 7);
        expect(found.totalVanadium[0]! / (2 * total)).toBeCloseTo(1, 6);
        // χ² is a difference of two sums of squares: their rounding is all that is left.
        const whole = absorbance.reduce((sum, value) => sum + (value / model.noise) ** 2, 0);
        expect(found.chiSquare[0]).toBeLessThan(1e-12 * whole);
      },
    ),
    { numRuns: 60 },
  );
});

describe('many rows', () => {
  const row = (share: number, seed: number) => simulated({ pair: 'V4/V5', share, total: 1.6, seed }, 0.02).absorbance;
  const shares = Array.from({ length: 40 }, (_, i) => i / 39);
  const rows = shares.map((share, i) => row(share, i));
  const matrix = Float64Array.from(rows.flatMap((values) => [...values]));
  const many = prepare(reference, axis350, { pair: 'V4/V5', pathLength: 0.02 });

  test('order does not matter, to the last bit: the kernel remembers nothing', () => {
    const there = many.solveMany(matrix);
    const back = many.solveMany(Float64Array.from([...rows].reverse().flatMap((values) => [...values])));
    for (const name of ['stateOfCharge', 'uncertainty', 'totalVanadium', 'chiSquare'] as const)
      expect([...back[name]].reverse()).toEqual([...there[name]]);
  });

  test('the share comes back within its uncertainty', () => {
    const { stateOfCharge, uncertainty } = many.solveMany(matrix);
    const far = shares.filter((share, i) => Math.abs(stateOfCharge[i]! - share) > 3 * uncertainty[i]!);
    expect(far).toEqual([]);
  });

  test('a row with a NaN gives NaN and leaves its neighbours alone', () => {
    const spoiled = matrix.slice();
    spoiled[3 * 350 + 100] = NaN;
    spoiled[7 * 350 + 5] = Infinity;
    const clean = many.solveMany(matrix);
    const found = many.solveMany(spoiled);
    for (const name of ['stateOfCharge', 'uncertainty', 'totalVanadium', 'chiSquare'] as const)
      found[name].forEach((value, i) => {
        if (i === 3 || i === 7) expect(value).toBeNaN();
        else expect(value).toBe(clean[name][i]);
      });
  });

  test('a NaN outside the calibration’s range does no harm', () => {
    const wide = Float64Array.from({ length: 701 }, (_, i) => 350 + i);
    const fine = simulated(
      { pair: 'V4/V5', share: 0.4, total: 1.6, seed: 1 },
      0.02,
      1,
      Float64Array.from({ length: 525 }, (_, i) => 428 + i),
    );
    const absorbance = wide.map((nm) => (nm >= 428 && nm <= 952 ? fine.absorbance[nm - 428]! : NaN));
    const found = prepare(reference, wide, { pair: 'V4/V5', pathLength: 0.02 }).solveMany(absorbance);
    expect(found.stateOfCharge[0]).toBeCloseTo(byReference(reference, 'V4/V5', fine, 0.02).stateOfCharge, 7);
  });

  test('arrays that are not asked for are not touched', () => {
    const out = { stateOfCharge: new Float64Array(40) };
    expect(many.solveMany(matrix, out)).toBe(out);
    expect([...out.stateOfCharge]).toEqual([...many.solveMany(matrix).stateOfCharge]);
  });
});

describe('the fast code', () => {
  afterEach(() => vi.unstubAllGlobals());
  const rowsFor = (pair: Pair, pathLength: number) =>
    Float64Array.from({ length: 60 }, (_, i) => i).reduce((all: number[], i) => {
      const sample = { pair, share: (i + 0.5) / 60, total: 0.9 + 0.015 * i, seed: i };
      return [...all, ...simulated(sample, pathLength).absorbance];
    }, []);

  test.each<[Pair, number]>([
    ['V2/V3', 0.1],
    ['V3/V4', 0.05],
    ['V4/V5', 0.02],
  ])('%s: what it solves is what the plain solver solves, and it solves nearly all', (pair, pathLength) => {
    const rows = Float64Array.from(rowsFor(pair, pathLength));
    const fast = prepare(reference, axis350, { pair, pathLength });
    vi.stubGlobal('WebAssembly', undefined);
    const plain = prepare(reference, axis350, { pair, pathLength });
    const [a, b] = [fast.solveMany(rows), plain.solveMany(rows)];
    for (const name of ['stateOfCharge', 'uncertainty', 'totalVanadium', 'totalUncertainty'] as const)
      a[name].forEach((value, i) => expect(value / b[name][i]!).toBeCloseTo(1, 7));
    a.chiSquare.forEach((value, i) => expect(value / b.chiSquare[i]!).toBeCloseTo(1, 6));
  });

  test('where a page forbids code made at run time the plain solver serves', () => {
    function Forbidden(): never {
      throw new WebAssembly.CompileError('forbidden by the content security policy');
    }
    const real = WebAssembly;
    vi.stubGlobal('WebAssembly', { Memory: real.Memory, CompileError: real.CompileError, Module: Forbidden });
    const many = prepare(reference, axis350, { pair: 'V4/V5', pathLength: 0.02 });
    const found = many.solveMany(simulated({ pair: 'V4/V5', share: 0.4, total: 1.6, seed: 1 }, 0.02).absorbance);
    expect(found.stateOfCharge[0]).toBeCloseTo(0.4, 1);
  });

  test('it takes nearly every sound row, and leaves those that need another start', () => {
    const { model, betweenGroup } = reference.pairs.find((one) => one.pair === 'V4/V5')!;
    const map = axisMap(axis350, model.wavelength, reference.grid.step);
    const solver = rowSolver({ pair: 'V4/V5', model, betweenGroup }, map.reached, { pathLength: 0.02 });
    const code = solver.fast(map, 350)!;
    const rows = Float64Array.from(rowsFor('V4/V5', 0.02)).subarray(0, 40 * 350);
    code.input.set(rows);
    code.input.fill(NaN, 3 * 350, 4 * 350);
    code.input.fill(-1, 5 * 350, 6 * 350);
    code.run(40, WANTED.share | WANTED.chiSquare);
    const left = [...code.left.subarray(0, 40).keys()].filter((r) => code.left[r] !== 0);
    expect(left).toEqual([3, 5]);
  });
});

test('the uncertainty is that of a full assay', () => {
  for (const side of ['negative', 'positive'] as Side[]) {
    const pair = PAIR_OF_SIDE[side];
    const pathLength = side === 'negative' ? 0.1 : 0.01;
    const spectrum = simulated({ pair, share: 0.45, total: 1.5, seed: 4 }, pathLength);
    const assay = assaySample(
      {
        name: 'a',
        system: '',
        side,
        spectrum,
        blank: 'given',
        pathLength,
        pathUncertainty: null,
        dilution: 1,
        dilutionUncertainty: null,
        temperature: null,
        acid: null,
        takenAt: null,
        scannedAt: null,
        inertGas: null,
        cell: null,
        flask: null,
      },
      { calibration: reference, sha256: 'test', isReference: true },
      { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
    );
    const found = prepare(reference, spectrum.wavelength, { pair, pathLength }).solveMany(spectrum.absorbance);
    expect(assay.pair).toBe(pair);
    expect(found.stateOfCharge[0]).toBeCloseTo(assay.stateOfCharge.value!, 7);
    expect(found.uncertainty[0]! / assay.stateOfCharge.uncertainty!).toBeCloseTo(1, 3);
  }
});

describe('refusals', () => {
  const good = { pair: 'V4/V5' as Pair, pathLength: 0.02 };
  test.each([
    [{ pathLength: 0 }, 'out-of-range', 'pathLength'],
    [{ pathLength: NaN }, 'out-of-range', 'pathLength'],
    [{ dilution: 0.5 }, 'out-of-range', 'dilution'],
  ])('%j is refused as %s', (change, code, where) => {
    expect(() => prepare(reference, axis350, { ...good, ...change })).toThrow(expect.objectContaining({ code, where }));
  });
  test('an axis that falls', () => {
    expect(() => prepare(reference, axis350.slice().reverse(), good)).toThrow(
      expect.objectContaining({ code: 'axis-turns', where: 'wavelengths[1]' }),
    );
  });
  test('an axis beside the calibration', () => {
    expect(() => prepare(reference, Float64Array.of(300, 310, 320), good)).toThrow(
      expect.objectContaining({ code: 'too-few-wavelengths' }),
    );
  });
  test('a pair that is not there', () => {
    const few = { ...reference, pairs: reference.pairs.slice(0, 1) };
    expect(() => prepare(few, axis350, good)).toThrow(expect.objectContaining({ code: 'not-calibrated' }));
  });
  test('half a spectrum, and too small an array', () => {
    const many = prepare(reference, axis350, good);
    expect(() => many.solveMany(new Float64Array(351))).toThrow(expect.objectContaining({ code: 'length-differs' }));
    expect(() => many.solveMany(new Float64Array(700), { chiSquare: new Float64Array(1) })).toThrow(
      expect.objectContaining({ code: 'length-differs', where: 'out.chiSquare' }),
    );
  });
});
