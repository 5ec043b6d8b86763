import { expect, test } from 'vitest';
import { pathFromFringes } from '../../src/bench/instrument/interferenceFringes.ts';
import { normalDeviates, scan } from './simulated.ts';

/** Two faces of reflectance R about a gap of `path` cm: the exact two-mirror law, over a sloping baseline. */
const gap =
  (path: number, noise: () => number, R = 0.035) =>
  (nm: number) => {
    const phase = (4 * Math.PI * path * 1e7) / nm;
    const transmittance = (1 - R) ** 2 / (1 + R * R - 2 * R * Math.cos(phase));
    return -Math.log10(transmittance) + 0.03 + 1e-5 * (nm - 600) + 0.001 * noise();
  };

const OPTIONS = { refractiveIndex: 1, nominalPath: 0.01, wavelengthUncertainty: 0 };

// ℓ = N/(2n(1/λ₁ − 1/λ₂)): whole fringes counted between two wavelengths give the path.
test('the path is that of the fringes counted on paper', () => {
  const found = pathFromFringes(
    scan(
      'cell',
      400,
      900,
      0.2,
      gap(0.0103, () => 0),
    ),
    OPTIONS,
  )!;
  expect(found.pathLength).toBeCloseTo(0.0103, 6);
  const [from, to] = found.between;
  expect(found.fringes / (2 * (1 / from - 1 / to)) / 1e7).toBeCloseTo(found.pathLength, 9);
  expect(found.fringes).toBe(286);
});

test('an absorbance that swings by 0.06 comes back as its amplitude', () => {
  // Peak to valley of the two-mirror law: 2 log10((1 + R)/(1 − R)) = 0.0608 for R = 0.035; its fundamental is half of it.
  const found = pathFromFringes(
    scan(
      'cell',
      400,
      900,
      0.2,
      gap(0.0103, () => 0),
    ),
    OPTIONS,
  )!;
  expect(found.amplitude).toBeCloseTo(Math.log10(1.035 / 0.965), 3);
});

test.each([0.005, 0.01])('paths of %s cm: 95 % intervals hold the truth 93 to 97 times in 100', (nominal) => {
  let inside = 0;
  const runs = 400;
  for (let seed = 1; seed <= runs; seed++) {
    const truth = nominal * (1 + 0.0007 * (seed % 83));
    const spectrum = scan('cell', 500, 600, 0.2, gap(truth, normalDeviates(seed)));
    const found = pathFromFringes(spectrum, { ...OPTIONS, nominalPath: nominal })!;
    if (Math.abs(found.pathLength - truth) < 1.96 * found.uncertainty) inside += 1;
  }
  expect(inside / runs).toBeGreaterThanOrEqual(0.93);
  expect(inside / runs).toBeLessThanOrEqual(0.97);
});

test('an uncertain wavelength axis widens the path by (σ₁ + σ₂)δ', () => {
  const spectrum = scan(
    'cell',
    400,
    900,
    0.2,
    gap(0.01, () => 0),
  );
  const found = pathFromFringes(spectrum, { ...OPTIONS, wavelengthUncertainty: 0.3 })!;
  // (25000 + 11111) cm⁻¹ × 0.3 nm = 0.108 %.
  expect(found.uncertainty / found.pathLength).toBeCloseTo(0.00108, 4);
  // And that is what a shifted axis does.
  const shifted = scan('cell', 400, 900, 0.2, (nm) => gap(0.01, () => 0)(nm - 0.3));
  expect(pathFromFringes(shifted, OPTIONS)!.pathLength / 0.01 - 1).toBeCloseTo(0.00108, 4);
});

test('noise alone is not called fringes', () => {
  let found = 0;
  for (let seed = 1; seed <= 200; seed++) {
    const noise = normalDeviates(seed);
    const spectrum = scan('cell', 500, 600, 0.2, (nm) => 0.03 + 1e-5 * nm + 0.001 * noise());
    if (pathFromFringes(spectrum, OPTIONS)) found += 1;
  }
  expect(found).toBeLessThanOrEqual(1);
});

test('without a nominal path the whole resolvable range is searched', () => {
  const spectrum = scan('cell', 400, 900, 0.5, gap(0.0052, normalDeviates(3)));
  expect(pathFromFringes(spectrum, { ...OPTIONS, nominalPath: 0 })!.pathLength).toBeCloseTo(0.0052, 6);
});

test.each([
  ['fringes-too-fine', scan('coarse', 400, 900, 1, () => 0.03), 0.1],
  ['points-missing', scan('short', 400, 410, 1, () => 0.03), 0.01],
])('%s is refused', (code, spectrum, nominalPath) => {
  expect(() => pathFromFringes(spectrum, { ...OPTIONS, nominalPath })).toThrow(expect.objectContaining({ code }));
});
