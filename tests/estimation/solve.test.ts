import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { prepare, whiten } from '../../src/estimation/prepare.ts';
import { reduce, solve } from '../../src/estimation/solve.ts';
import { dot } from '../../src/numerics/gramSchmidt.ts';
import { inventedAbsorbance, inventedModel } from '../support/inventedModel.ts';

const KNOWN_PATH = { pathUncertainty: 0, wavelengthUncertainty: 0 };
const concentration = fc.double({ min: 0.02, max: 1.6, noNaN: true });

describe('prepare and solve', () => {
  const model = inventedModel();
  const prepared = prepare(model, []);

  test('a noiseless spectrum gives its composition back', () => {
    fc.assert(
      fc.property(concentration, concentration, (lower, higher) => {
        const absorbance = inventedAbsorbance(model, lower, higher, 0.02);
        const solution = solve(prepared, reduce(prepared, absorbance), { pathLength: 0.02, ...KNOWN_PATH });
        expect(solution.converged).toBe(true);
        expect(solution.lower).toBeCloseTo(lower, 6);
        expect(solution.higher).toBeCloseTo(higher, 6);
      }),
      { numRuns: 300 },
    );
  });

  test('path and concentration scale: twice the path of a Beer-Lambert pair is half the concentration', () => {
    const plain = {
      ...model,
      associations: [],
      spectra: model.spectra.slice(0, 2),
      designInverse: new Float64Array(4),
    };
    const ready = prepare(plain, []);
    fc.assert(
      fc.property(concentration, concentration, (lower, higher) => {
        const absorbance = inventedAbsorbance(plain, lower, higher, 0.1);
        const one = solve(ready, reduce(ready, absorbance), { pathLength: 0.1, ...KNOWN_PATH });
        const two = solve(ready, reduce(ready, absorbance), { pathLength: 0.2, ...KNOWN_PATH });
        expect(two.lower).toBeCloseTo(one.lower / 2, 9);
        expect(two.higher).toBeCloseTo(one.higher / 2, 9);
      }),
    );
  });

  test('two dilutions agree through mass action and do not without it', () => {
    const [lower, higher] = [0.8, 0.8];
    const dense = inventedAbsorbance(model, lower, higher, 0.02);
    const thin = inventedAbsorbance(model, lower / 20, higher / 20, 1);
    const withComplex = (absorbance: Float64Array, pathLength: number) => {
      const solution = solve(prepared, reduce(prepared, absorbance), { pathLength, ...KNOWN_PATH });
      return solution.higher / (solution.lower + solution.higher);
    };
    expect(withComplex(thin, 1)).toBeCloseTo(withComplex(dense, 0.02), 6);
    const plain = {
      ...model,
      associations: [],
      spectra: model.spectra.slice(0, 2),
      designInverse: new Float64Array(4),
    };
    const ready = prepare(plain, []);
    const withoutComplex = (absorbance: Float64Array, pathLength: number) => {
      const solution = solve(ready, reduce(ready, absorbance), { pathLength, ...KNOWN_PATH });
      return solution.higher / (solution.lower + solution.higher);
    };
    expect(Math.abs(withoutComplex(thin, 1) - withoutComplex(dense, 0.02))).toBeGreaterThan(0.05);
  });

  test('the reduced problem has the χ² of the full one', () => {
    const absorbance = inventedAbsorbance(model, 0.5, 0.7, 0.02).map((value, i) => value + 0.001 * Math.sin(7 * i));
    const solution = solve(prepared, reduce(prepared, absorbance), { pathLength: 0.02, ...KNOWN_PATH });
    const fitted = inventedAbsorbance(model, solution.lower, solution.higher, 0.02);
    const residual = whiten(
      prepared.whitening,
      absorbance.map((value, i) => value - fitted[i]!),
    );
    expect(solution.chiSquare).toBeCloseTo(dot(residual, residual), 6);
  });

  test('whitening by modes equals the inverse of the full covariance', () => {
    // x ᵀ(σ²I + ΣggT)⁻¹ x checked through the Woodbury identity for one mode at a time: direct 1-mode formula.
    const one = { ...model, modes: [model.modes[0]!] };
    const { whitening } = prepare(one, []);
    const x = model.wavelength.map((nm) => Math.cos(nm / 37));
    const g = model.modes[0]!;
    const s2 = model.noise ** 2;
    const direct = (dot(x, x) - dot(x, g) ** 2 / (s2 + dot(g, g))) / s2;
    const white = whiten(whitening, x);
    expect(dot(white, white) / direct).toBeCloseTo(1, 9);
  });

  test('uncertainties match the scatter of repeated noise', () => {
    let seed = 7;
    const uniform = () => (seed = (seed * 16807) % 2147483647) / 2147483647;
    const normal = () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
    const exact = inventedAbsorbance(model, 0.6, 0.5, 0.02);
    const found: number[] = [];
    let stated = 0;
    for (let run = 0; run < 400; run++) {
      const weights = model.modes.map(normal);
      const absorbance = exact.map(
        (value, i) =>
          value + model.noise * normal() + model.modes.reduce((sum, mode, j) => sum + weights[j]! * mode[i]!, 0),
      );
      const solution = solve(prepared, reduce(prepared, absorbance), { pathLength: 0.02, ...KNOWN_PATH });
      found.push(solution.higher);
      stated = Math.sqrt(solution.covariance[5]!);
    }
    const mean = found.reduce((a, b) => a + b, 0) / found.length;
    const scatter = Math.sqrt(found.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (found.length - 1));
    // 400 draws know a standard deviation to 3.5 %: three of those.
    expect(scatter / stated).toBeGreaterThan(0.89);
    expect(scatter / stated).toBeLessThan(1.11);
    expect(Math.abs(mean - 0.5)).toBeLessThan((3.3 * stated) / 20);
  });

  test('too few usable wavelengths are refused', () => {
    const usable = model.wavelength.map((_, i) => (i < 5 ? 1 : 0));
    expect(() => prepare(model, [], usable)).toThrow(expect.objectContaining({ code: 'too-few-wavelengths' }));
  });
});
