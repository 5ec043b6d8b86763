import { describe, expect, test } from 'vitest';
import { detectionLimits } from '../../src/numerics/detectionLimits.ts';
import { demingLine, fitLineWithErrorsInBoth } from '../../src/numerics/errorsInVariables.ts';
import { fitLine, fitLineOfKnownUncertainty, inversePrediction, lineAt, type Line } from '../../src/numerics/line.ts';
import { example, expectPrinted, expectRelative, HAS_REFERENCES, WITHOUT_REFERENCES } from './published.ts';

const FILE = 'calibration_line';
const halfWidth = ([low, high]: readonly [number, number]): number => (high - low) / 2;
const reading = (line: Line, count: number): number => line.residualDeviation / Math.sqrt(count);

describe.skipIf(!HAS_REFERENCES)(`straight-line calibration ${WITHOUT_REFERENCES}`, () => {
  test('GUM H.3: thermometer correction', () => {
    const { inputs, published, recomputed } = example(FILE, 'GUM H.3');
    const line = fitLine(
      inputs.t_C.map((t: number) => t - inputs.t0_C),
      inputs.correction_C,
    );
    const at30 = lineAt(line, inputs.predict_at_C - inputs.t0_C);
    const correlation = line.covariance / Math.sqrt(line.interceptVariance * line.slopeVariance);
    for (const [found, key, decimals] of [
      [line.intercept, 'y1_C', 4],
      [Math.sqrt(line.interceptVariance), 's_y1_C', 4],
      [line.slope, 'y2', 5],
      [Math.sqrt(line.slopeVariance), 's_y2', 5],
      [correlation, 'correlation', 2],
      [line.residualDeviation, 's_C', 4],
      [at30.value, 'predicted_C', 4],
      [at30.uncertainty, 'u_predicted_C', 4],
    ] as const) {
      expectPrinted(found, published[key], decimals);
      expectRelative(found, recomputed[key], 1e-6);
    }
    expect(line.degreesOfFreedom).toBe(published.degrees_of_freedom);
  });

  test('QUAM A5: concentration of cadmium from a line', () => {
    const { inputs, published, recomputed } = example(FILE, 'QUAM A5');
    const line = fitLine(inputs.c_mg_L, inputs.absorbance);
    const samples: number[] = inputs.sample_absorbance;
    const found = inversePrediction(line, (samples[0]! + samples[1]!) / 2, reading(line, 2));
    expectRelative(line.slope, recomputed.B1, 1e-6);
    expectRelative(line.intercept, recomputed.B0, 1e-6);
    expectRelative(Math.sqrt(line.slopeVariance), recomputed.u_B1, 1e-6);
    expectRelative(Math.sqrt(line.interceptVariance), recomputed.u_B0, 1e-6);
    expectRelative(line.residualDeviation, recomputed.S, 1e-6);
    expectRelative(found.value, recomputed.c0_mg_L, 1e-6);
    expectRelative(found.uncertainty, recomputed.u_c0_mg_L, 1e-6);
    expectPrinted(found.value, published.c0_mg_L, 2);
    expectPrinted(found.uncertainty, published.u_c0_mg_L, 3);
  });

  test.each(['inverse prediction, six', 'inverse prediction, fluorescein'])('%s: reading backwards', (name) => {
    const { inputs, recomputed } = example(FILE, name);
    const line = fitLine(inputs.x ?? inputs.x_pg_mL, inputs.y);
    expectRelative(line.intercept, recomputed.intercept, 1e-8);
    expectRelative(line.slope, recomputed.slope, 1e-8);
    expectRelative(line.residualDeviation, recomputed.s_y, 1e-8);
    inputs.samples.forEach(({ y, m }: { y: number; m: number }, i: number) => {
      const found = inversePrediction(line, y, reading(line, m));
      expectRelative(found.value, recomputed.samples[i].x0, 1e-8);
      expectRelative(found.uncertainty, recomputed.samples[i].s, 1e-8);
      // The books' interval is value ± t·s; Fieller's is a little wider and lopsided, by g = t²V_b/b², here 1 % or less.
      const published = recomputed.samples[i].half_width_95;
      if (published) {
        const ratio = halfWidth(found.interval!) / published;
        expect(ratio).toBeGreaterThan(1);
        expect(ratio).toBeLessThan(1.03);
      }
    });
  });

  test.each(['ISO/TS 28037 equal known weights', 'ISO/TS 28037 unequal known weights'])('%s', (name) => {
    const { inputs, recomputed } = example(FILE, name);
    const u = Array.isArray(inputs.u_y) ? inputs.u_y : inputs.x.map(() => inputs.u_y);
    const line = fitLineOfKnownUncertainty(inputs.x, inputs.y, u);
    expectRelative(line.intercept, recomputed.a, 1e-9);
    expectRelative(Math.sqrt(line.interceptVariance), recomputed.u_a, 1e-9);
    expectRelative(line.slope, recomputed.b, 1e-9);
    expectRelative(Math.sqrt(line.slopeVariance), recomputed.u_b, 1e-9);
    expectRelative(line.covariance, recomputed.cov, 1e-9);
    expectRelative(line.residualSumOfSquares, recomputed.chi_squared, 1e-9);
    const backwards = inversePrediction(line, inputs.inverse.y, inputs.inverse.u_y);
    expectRelative(backwards.value, recomputed.inverse.x, 1e-9);
    expectRelative(backwards.uncertainty, recomputed.inverse.u, 1e-9);
    if (!inputs.forward) return;
    const forwards = lineAt(line, inputs.forward.x, inputs.forward.u_x);
    expectRelative(forwards.value, recomputed.forward.y, 1e-9);
    expectRelative(forwards.uncertainty, recomputed.forward.u, 1e-9);
  });

  test('DIN 32645: decision, detection and quantification limits', () => {
    const { inputs, published, recomputed } = example(FILE, 'DIN 32645');
    const line = fitLine(inputs.x, inputs.y);
    const limits = detectionLimits(line, { alpha: inputs.alpha, beta: inputs.alpha });
    expectRelative(limits.critical, recomputed.x_NG, 1e-7);
    expectRelative(limits.criticalResponse, recomputed.y_critical, 1e-7);
    expectRelative(limits.detection, recomputed.x_EG, 1e-7);
    expectRelative(limits.quantification!, recomputed.x_BG_iterated, 1e-7);
    expectRelative(limits.quantificationFirstStep, recomputed.x_BG_one_step_from_3_x_NG, 1e-7);
    expectPrinted(limits.critical, published.x_NG_4_digits, 4);
    expectPrinted(limits.detection, published.x_EG, 2);
    expectPrinted(limits.quantificationFirstStep, published.x_BG, 4);
    const found = inversePrediction(line, inputs.predict_y, reading(line, 1));
    expectRelative(found.value, recomputed.x_at_3500, 1e-7);
    expectRelative(found.uncertainty, recomputed.se_at_3500, 1e-7);
  });

  test('ISO/TS 28037, both variables: two families of uncertainty', () => {
    const { inputs, recomputed } = example(FILE, 'ISO/TS 28037 uncertainties in both');
    const fit = fitLineWithErrorsInBoth({
      x: inputs.x,
      y: inputs.y,
      uncertaintyX: inputs.x.map(() => inputs.u_x),
      uncertaintyY: inputs.u_y,
    });
    expectRelative(fit.line.intercept, recomputed.a, 1e-9);
    expectRelative(fit.line.slope, recomputed.b, 1e-9);
    expectRelative(Math.sqrt(fit.line.interceptVariance), recomputed.u_a, 1e-6);
    expectRelative(Math.sqrt(fit.line.slopeVariance), recomputed.u_b, 1e-6);
    expectRelative(fit.line.covariance, recomputed.cov, 1e-6);
    expectRelative(fit.chiSquare, recomputed.chi_squared, 1e-6);
    expect(fit.chiSquareFreedom).toBe(4);
    expectRelative(Math.sqrt(fit.bySensitivity.interceptVariance), recomputed.u_by_sensitivities.a, 1e-6);
    expectRelative(Math.sqrt(fit.bySensitivity.slopeVariance), recomputed.u_by_sensitivities.b, 1e-6);
    expectRelative(fit.bySensitivity.covariance, recomputed.u_by_sensitivities.cov, 1e-6);
  });
});

// Data: K. Pearson, Phil. Mag. 1901, 2, 559; weights 1/u²: D. York, Can. J. Phys. 1966, 44, 1079. Exact line: F. Neri, G. Saitta, S. Chiofalo,
// J. Phys. E 1989, 22, 215. Uncertainties: D. York et al., Am. J. Phys. 2004, 72, 367; A. H. Kalantar, Meas. Sci. Technol. 1992, 3, 1113.
describe("Pearson's data with York's weights", () => {
  const x = [0.0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4];
  const y = [5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5];
  const deviations = (weights: readonly number[]) => weights.map((w) => 1 / Math.sqrt(w));
  const fit = fitLineWithErrorsInBoth({
    x,
    y,
    uncertaintyX: deviations([1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1]),
    uncertaintyY: deviations([1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500]),
  });

  test('line', () => {
    expectPrinted(fit.line.intercept, 5.47991022, 8);
    expectPrinted(fit.line.slope, -0.480533407, 9);
    expectPrinted(fit.chiSquare / 8, 1.483294149, 9);
  });

  test('uncertainties of York 2004', () => {
    expectPrinted(Math.sqrt(fit.line.interceptVariance), 0.294970735, 8);
    expectPrinted(Math.sqrt(fit.line.slopeVariance), 0.057985009, 8);
  });

  test('uncertainties of Kalantar 1992', () => {
    expectPrinted(Math.sqrt(fit.bySensitivity.interceptVariance), 0.29193, 5);
    expectPrinted(Math.sqrt(fit.bySensitivity.slopeVariance), 0.057617, 6);
    expectPrinted(fit.bySensitivity.covariance, -0.0162, 4);
  });

  // Recomputed by direct minimisation of the distances; plain least squares would give -0.5396.
  test('without weights: shortest distances', () => {
    const { intercept, slope } = demingLine(x, y, 1);
    expectRelative(intercept, 5.78404377453, 1e-10);
    expectRelative(slope, -0.545561197521, 1e-10);
    expect(fitLine(x, y).slope).toBeCloseTo(-0.53957727, 8);
  });
});
