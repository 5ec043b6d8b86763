import { describe, expect, test } from 'vitest';
import { compareIntervals, monteCarlo, numericalTolerance } from '../../src/numerics/monteCarlo.ts';
import { independent, propagate, propagateTogether } from '../../src/numerics/propagate.ts';
import { seededRandom, type Random } from '../../src/numerics/random.ts';
import { mean } from '../../src/numerics/meanAndDeviation.ts';
import { example, expectPrinted, expectRelative, HAS_REFERENCES, WITHOUT_REFERENCES } from './published.ts';

const TRIALS = 1_000_000;
const rectangular = (random: Random, centre: number, halfWidth: number): number =>
  centre + halfWidth * (2 * random.uniform() - 1);

// JCGM 100:2008 (GUM), H.2, table H.2: five simultaneous readings of voltage, current and phase; R = V cos φ/I, X = V sin φ/I, Z = V/I.
// First approach: from the means and the covariance of the means. Without the correlations u(R) would be 0.195 Ω instead of 0.071.
describe('GUM H.2: results of correlated readings', () => {
  const readings = [
    [5.007, 4.994, 5.005, 4.99, 4.999],
    [19.663e-3, 19.639e-3, 19.64e-3, 19.685e-3, 19.678e-3],
    [1.0456, 1.0438, 1.0468, 1.0428, 1.0433],
  ];
  const means = readings.map(mean);
  const covariance = readings.map((a, i) =>
    readings.map((b, j) => a.reduce((sum, value, k) => sum + (value - means[i]!) * (b[k]! - means[j]!), 0) / (5 * 4)),
  );
  const impedance = ([V, I, phi]: readonly number[]): number[] => [
    (V! * Math.cos(phi!)) / I!,
    (V! * Math.sin(phi!)) / I!,
    V! / I!,
  ];

  test('values, uncertainties and correlations', () => {
    const { values, uncertainties, correlation } = propagateTogether(impedance, means, covariance);
    [127.732, 219.847, 254.26].forEach((printed, i) => expectPrinted(values[i]!, printed, 3));
    // Printed 0.071, 0.295, 0.236 and −0.588, −0.485, 0.993, of which 0.295 and 0.993 belong to the second approach.
    [0.07107141, 0.29558168, 0.23633613].forEach((u, i) => expectRelative(uncertainties[i]!, u, 1e-6));
    expectRelative(correlation[0]![1]!, -0.58842978, 1e-6);
    expectRelative(correlation[0]![2]!, -0.48525922, 1e-6);
    expectRelative(correlation[1]![2]!, 0.99251165, 1e-6);
  });

  test('one result alone says the same', () => {
    const { value, uncertainty } = propagate((x) => impedance(x)[0]!, means, covariance);
    expectPrinted(value, 127.732, 3);
    expectPrinted(uncertainty, 0.071, 3);
    const apart = covariance.map((row, i) => row.map((each, j) => (i === j ? each : 0)));
    expectPrinted(propagate((x) => impedance(x)[0]!, means, apart).uncertainty, 0.195, 3);
  });
});

describe.skipIf(!HAS_REFERENCES)(`budgets of analytical preparation ${WITHOUT_REFERENCES}`, () => {
  test('QUAM A1: calibration standard', () => {
    const { inputs, recomputed } = example('uncertainty', 'QUAM A1');
    const { m_mg, P, V_mL } = inputs;
    const uV = Math.hypot(
      V_mL.flask_triangular_half_width / Math.sqrt(6),
      V_mL.repeatability_sd,
      V_mL.temperature_rectangular_half_width / Math.sqrt(3),
    );
    expectRelative(uV, recomputed.u_V_mL, 1e-8);
    const uncertainties = [m_mg.u, P.rectangular_half_width / Math.sqrt(3), uV];
    const { value, uncertainty, sensitivities } = propagate(
      ([m, p, v]) => (1000 * m! * p!) / v!,
      [m_mg.value, P.value, V_mL.value],
      independent(uncertainties),
    );
    expectRelative(value, recomputed.c_mg_L, 1e-9);
    expectRelative(uncertainty, recomputed.u_mg_L, 1e-8);
    const { contributions_mg_L: parts } = recomputed;
    [parts.m, parts.P, parts.V].forEach((part, i) =>
      expectRelative(Math.abs(sensitivities[i]! * uncertainties[i]!), part, 1e-5),
    );
  });

  test('QUAM A2: sodium hydroxide against phthalate', () => {
    const { inputs, recomputed } = example('uncertainty', 'QUAM A2');
    const { m_g, P, R, V_mL, formula, atomic_mass_g_mol: masses, atomic_mass_rectangular_half_width: reach } = inputs;
    const elements = Object.keys(formula);
    const molarMass = elements.reduce((sum, element) => sum + formula[element] * masses[element], 0);
    const uM = Math.hypot(...elements.map((element) => (formula[element] * reach[element]) / Math.sqrt(3)));
    expectRelative(uM, recomputed.u_M_g_mol, 1e-5);
    const uV = Math.hypot(V_mL.calibration_triangular_half_width / Math.sqrt(6), V_mL.temperature_sd);
    const uncertainties = [
      R.u,
      (Math.SQRT2 * m_g.two_weighings_rectangular_half_width) / Math.sqrt(3),
      P.rectangular_half_width / Math.sqrt(3),
      uM,
      uV,
    ];
    const { value, uncertainty } = propagate(
      ([r, m, p, M, v]) => (r! * 1000 * m! * p!) / (M! * v!),
      [R.value, m_g.value, P.value, molarMass, V_mL.value],
      independent(uncertainties),
    );
    expectRelative(value, recomputed.c_mol_L, 1e-9);
    expectRelative(uncertainty, recomputed.u_mol_L, 1e-7);
  });
});

const sumOf = (x: readonly number[]): number => x.reduce((sum, value) => sum + value, 0);

// JCGM 101:2008, 9.2: the sum of four quantities; 95 % intervals by the linear rule are ± 3.92 (9.2.2, 9.2.3) and ± 19.9 (9.2.4).
describe('JCGM 101, 9.2: additive model', () => {
  test('four normal quantities: both rules agree', () => {
    const drawn = monteCarlo(sumOf, (random) => [0, 0, 0, 0].map(() => random.normal()), TRIALS, seededRandom(1));
    expect(Math.abs(drawn.mean)).toBeLessThan(0.008);
    expect(drawn.standardDeviation).toBeCloseTo(2, 2);
    const tolerance = numericalTolerance(2, 2);
    expect(tolerance).toBe(0.05);
    expect(compareIntervals([-3.91992797, 3.91992797], drawn.interval, tolerance)).toMatchObject({ agrees: true });
    drawn.interval.forEach((end, i) => expect(Math.abs(end - [-3.91992797, 3.91992797][i]!)).toBeLessThan(0.02));
  });

  test('four rectangular quantities: the interval is 1 % narrower', () => {
    const drawn = monteCarlo(
      sumOf,
      (random) => [0, 0, 0, 0].map(() => rectangular(random, 0, Math.sqrt(3))),
      TRIALS,
      seededRandom(2),
    );
    // Exact: 2√3 (2 − (3/5)^¼) = 3.8794.
    drawn.interval.forEach((end, i) => expect(Math.abs(end - [-3.8794067, 3.8794067][i]!)).toBeLessThan(0.01));
    expect(compareIntervals([-3.92, 3.92], drawn.interval, numericalTolerance(2, 3)).agrees).toBe(false);
  });

  // From memory of the standard, confirmed by numerical convolution: ± 17.0158.
  test('one of them ten times wider: the linear rule is 17 % too wide and is told so', () => {
    const drawn = monteCarlo(
      sumOf,
      (random) => [1, 1, 1, 10].map((u) => rectangular(random, 0, u * Math.sqrt(3))),
      TRIALS,
      seededRandom(3),
    );
    expectRelative(drawn.standardDeviation, 10.1488915651, 0.002);
    drawn.interval.forEach((end, i) => expect(Math.abs(end - [-17.0158141, 17.0158141][i]!)).toBeLessThan(0.05));
    const { agrees, tolerance } = compareIntervals(
      [-19.891462, 19.891462],
      drawn.interval,
      numericalTolerance(10.1, 2),
    );
    expect(tolerance).toBe(0.5);
    expect(agrees).toBe(false);
  });
});

// JCGM 101:2008, 9.3 (from memory; moments confirmed by integration): calibration of a mass; both densities act in second order only, so the
// linear rule gives u = 0.0539 mg where it is 0.0755.
test('JCGM 101, 9.3: what first derivatives cannot see', () => {
  const model = ([m, dm, a, w, r]: readonly number[]): number =>
    (m! + dm!) * (1 + (a! - 1.2) * (1 / w! - 1 / r!)) - 100000;
  const linear = propagate(
    model,
    [100000, 1.234, 1.2, 8000, 8000],
    independent([0.05, 0.02, 0.1 / Math.sqrt(3), 1000 / Math.sqrt(3), 50 / Math.sqrt(3)]),
  );
  expectRelative(linear.uncertainty, 0.0538516481, 1e-6);
  const drawn = monteCarlo(
    model,
    (random) => [
      100000 + 0.05 * random.normal(),
      1.234 + 0.02 * random.normal(),
      rectangular(random, 1.2, 0.1),
      rectangular(random, 8000, 1000),
      rectangular(random, 8000, 50),
    ],
    TRIALS,
    seededRandom(4),
  );
  expectRelative(drawn.standardDeviation, 0.0754797399541, 0.002);
  // The ends of the shortest interval are ill-determined (the density is symmetric); its width is not: 0.2992.
  expect(Math.abs(drawn.shortestInterval[1] - drawn.shortestInterval[0] - 0.2992)).toBeLessThan(0.002);
  drawn.interval.forEach((end, i) => expect(Math.abs(end - [1.08446, 1.38359][i]!)).toBeLessThan(0.002));
});

// NPL Report DEM-ES-011, 9.2: y = ln x, x rectangular on 0.1 … 1.1; a relative of absorbance from transmittance. Exact by integration:
// mean −0.66490, u 0.60623, shortest 95 % interval −1.89712 … 0.09531. The linear rule gives −0.511, 0.481 and 0.432 as upper end.
test('NPL DEM-ES-011: logarithm of a rectangular quantity', () => {
  const linear = propagate(([x]) => Math.log(x!), [0.6], independent([1 / Math.sqrt(12)]));
  expectPrinted(linear.value, -0.511, 3);
  expectPrinted(linear.uncertainty, 0.481, 3);
  const drawn = monteCarlo(Math.log, (random) => rectangular(random, 0.6, 0.5), TRIALS, seededRandom(5));
  expect(Math.abs(drawn.mean + 0.6649002929)).toBeLessThan(0.003);
  expect(Math.abs(drawn.standardDeviation - 0.6062266974)).toBeLessThan(0.003);
  drawn.shortestInterval.forEach((end, i) =>
    expect(Math.abs(end - [-1.8971199849, 0.0953101798][i]!)).toBeLessThan(0.006),
  );
  expect(drawn.interval[0]).toBeLessThan(drawn.shortestInterval[0]);
});
