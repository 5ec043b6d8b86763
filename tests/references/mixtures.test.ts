import { describe, expect, test } from 'vitest';
import { solveLeastSquares } from '../../src/numerics/leastSquares.ts';
import { example, expectRelative, HAS_REFERENCES, WITHOUT_REFERENCES } from './published.ts';

// M. Blanco et al., J. Chem. Educ. 1989, 66, 178: titanium and vanadium as peroxide complexes at five wavelengths, ppm.
test('titanium and vanadium: concentrations, their deviations and that they are correlated', () => {
  const titanium = [0.895, 0.884, 0.694, 0.481, 0.173].map((a) => a / 63.1);
  const vanadium = [0.326, 0.497, 0.528, 0.512, 0.374].map((a) => a / 96.4);
  const fit = solveLeastSquares(
    titanium.map((t, i) => [t, vanadium[i]!]),
    [0.651, 0.743, 0.665, 0.547, 0.314],
  );
  expectRelative(fit.coefficients[0]!, 32.04947741, 1e-8);
  expectRelative(fit.coefficients[1]!, 57.30417952, 1e-8);
  expectRelative(fit.standardDeviations[0]!, 0.302656, 1e-5);
  expectRelative(fit.standardDeviations[1]!, 0.693375, 1e-5);
  const correlation = fit.covariance[0]![1]! / fit.standardDeviations[0]! / fit.standardDeviations[1]!;
  expectRelative(correlation, -0.908314, 1e-5);
  expectRelative(fit.residualSumOfSquares, 2.808121e-5, 1e-5);
  expect(fit.degreesOfFreedom).toBe(3);
});

describe.skipIf(!HAS_REFERENCES)(`mixtures ${WITHOUT_REFERENCES}`, () => {
  test('dichromate and permanganate: two equations leave nothing to judge them by', () => {
    const { inputs, expected } = example('mixtures', 'dichromate and permanganate');
    const { standard_absorbance: absorbance, standard_concentration_mol_L: concentration } = inputs;
    const rows = [0, 1].map((i) => ['Cr2O7', 'MnO4'].map((ion) => absorbance[ion][i] / concentration[ion]));
    const fit = solveLeastSquares(rows, inputs.mixture_absorbance);
    expectRelative(fit.coefficients[0]!, expected.recomputed_mol_L.Cr2O7, 1e-9);
    expectRelative(fit.coefficients[1]!, expected.recomputed_mol_L.MnO4, 1e-9);
    expect(fit.degreesOfFreedom).toBe(0);
    expect(fit.standardDeviations).toEqual([NaN, NaN]);
  });

  test('chromium and manganese in steel, blank taken off', () => {
    const { inputs, expected } = example('mixtures', 'chromium and manganese');
    const { molar_absorptivity_L_mol_cm: absorptivity, mixture_absorbance: mixture, blank_absorbance: blank } = inputs;
    const fit = solveLeastSquares(
      [0, 1].map((i) => [absorptivity.Cr2O7[i], absorptivity.MnO4[i]]),
      mixture.map((a: number, i: number) => a - blank[i]),
    );
    expectRelative(fit.coefficients[0]!, expected.Cr2O7_mol_L, 1e-9);
    expectRelative(fit.coefficients[1]!, expected.MnO4_mol_L, 1e-9);
  });

  test('three species, exact data', () => {
    const { inputs, expected } = example('mixtures', 'own exact example');
    const absorptivity: Record<string, number[]> = inputs.molar_absorptivity_L_mol_cm;
    const fit = solveLeastSquares(
      inputs.wavelength_nm.map((_: number, i: number) =>
        ['A', 'B', 'C'].map((s) => inputs.path_cm * absorptivity[s]![i]!),
      ),
      inputs.absorbance,
    );
    ['A', 'B', 'C'].forEach((s, i) => expect(fit.coefficients[i]).toBeCloseTo(expected.concentration_mol_L[s], 12));
    expect(fit.residualSumOfSquares).toBeLessThan(1e-28);
  });
});
