import { expect, test } from 'vitest';
import { budgetOf } from '../../src/bench/titration/measuredBudget.ts';
import { normalisedError } from '../../src/bench/titration/agreement.ts';
import { strengthFromStandard } from '../../src/bench/titration/titrantStrength.ts';
import { MOLAR_MASS, molarMass } from '../../src/bench/molarMass.ts';
import {
  difference,
  exactly,
  measured,
  meanOfReplicates,
  product,
  quotient,
  scaled,
  sumOf,
  uncertaintyOf,
} from '../../src/numerics/measured.ts';

// Eurachem/CITAC Guide CG 4 (QUAM), 3rd ed. 2012, example A2: sodium hydroxide against potassium hydrogen phthalate,
// 0.3888 g, 18.64 mL: c = 0.10214 mol/L, u = 0.00010 mol/L; unrounded 0.102136159707 and 0.000100500722.
test('QUAM A2: strength of a titrant and its budget', () => {
  const rectangular = (halfWidth: number): number => halfWidth / Math.sqrt(3);
  const halfWidths = { C: 0.0008, H: 0.00007, O: 0.0003, K: 0.0001 };
  const molar = sumOf(
    scaled(measured(12.0107, rectangular(halfWidths.C), 'molar mass:C'), 8),
    scaled(measured(1.00794, rectangular(halfWidths.H), 'molar mass:H'), 5),
    scaled(measured(15.9994, rectangular(halfWidths.O), 'molar mass:O'), 4),
    measured(39.0983, rectangular(halfWidths.K), 'molar mass:K'),
  );
  const strength = strengthFromStandard(
    {
      electrons: 1,
      molarMass: molar,
      mass: measured(0.3888, Math.SQRT2 * rectangular(0.00015), 'weighing'),
      purity: measured(1, rectangular(0.0005), 'purity'),
    },
    sumOf(measured(18.64, 0.03 / Math.sqrt(6), 'burette'), measured(0, 0.006, 'temperature')),
  );
  const c = product(strength, measured(1, 0.0005, 'repeatability'));
  expect(c.value).toBeCloseTo(0.102136159707, 11);
  expect(uncertaintyOf(c)).toBeCloseTo(0.000100500722, 11);
  const shares = Object.fromEntries(budgetOf(c).map(({ source, uncertainty }) => [source, uncertainty]));
  expect(Math.hypot(shares['burette']!, shares['temperature']!)).toBeCloseTo(7.47292e-5, 9);
  expect(shares['repeatability']).toBeCloseTo(5.10681e-5, 9);
  expect(shares['weighing']).toBeCloseTo(3.21735e-5, 9);
  expect(shares['purity']).toBeCloseTo(2.94842e-5, 9);
  expect(shares['molar mass']).toBeCloseTo(1.88312e-6, 10);
});

// The same guide, example A1: 100.28 mg of cadmium in 100 mL; 1002.69972 mg/L, u = 0.835199226768 unrounded.
test('QUAM A1: a weighed standard made up in a flask', () => {
  const volume = sumOf(
    measured(100, 0.1 / Math.sqrt(6), 'flask'),
    measured(0, 0.02, 'repeatability'),
    measured(0, 0.084 / Math.sqrt(3), 'temperature'),
  );
  const c = scaled(
    quotient(product(measured(100.28, 0.05, 'mass'), measured(0.9999, 0.0001 / Math.sqrt(3), 'purity')), volume),
    1000,
  );
  expect(c.value).toBeCloseTo(1002.69972, 6);
  expect(uncertaintyOf(c)).toBeCloseTo(0.835199226768, 9);
});

// The same guide, example A3, inputs from memory: 0.3888 g phthalate, 18.64 and 14.89 mL of base, 15 mL of acid: 0.10139 mol/L.
test('QUAM A3: an acid against a base against a standard', () => {
  const base = strengthFromStandard(
    { electrons: 1, molarMass: exactly(204.2212), mass: exactly(0.3888), purity: exactly(1) },
    exactly(18.64),
  );
  expect(scaled(base, 14.89 / 15).value).toBeCloseTo(0.10139, 5);
});

test('what two results share cancels in their difference', () => {
  const shared = measured(10, 0.5, 'strength');
  const a = product(shared, measured(2, 0.01, 'a'));
  const b = product(shared, measured(2, 0.01, 'b'));
  expect(uncertaintyOf(difference(a, b))).toBeCloseTo(10 * 0.01 * Math.SQRT2, 12);
});

test('replicates that scatter more than they should widen their mean, those that agree do not', () => {
  const run = (value: number, name: string) => measured(value, 0.1, name);
  const calm = meanOfReplicates([run(1, 'a'), run(1.05, 'b'), run(0.95, 'c')], 'repeatability');
  expect(uncertaintyOf(calm.mean)).toBeCloseTo(0.1 / Math.sqrt(3), 12);
  const wild = meanOfReplicates([run(1, 'a'), run(2, 'b'), run(0, 'c')], 'repeatability');
  // the scatter of 0, 1, 2 is 1, of which the mean of three keeps 1/√3
  expect(uncertaintyOf(wild.mean)).toBeCloseTo(1 / Math.sqrt(3), 12);
  expect(wild.birgeRatio).toBeCloseTo(10, 10);
});

// ISO 13528, E_n = (x − y)/√(U² + U²), U = 2u.
test('E_n', () => {
  expect(normalisedError({ value: 0.62, uncertainty: 0.003 }, { value: 0.61, uncertainty: 0.004 })).toBeCloseTo(1, 12);
  expect(normalisedError({ value: null, uncertainty: null }, { value: 1, uncertainty: 1 })).toBeNull();
});

// Molar masses computed from IUPAC 2021 abridged atomic weights (from memory): a reference list gives the same figures.
test.each([
  ['vanadyl sulfate', MOLAR_MASS.vanadylSulfate, 162.9965],
  ['vanadium pentoxide', MOLAR_MASS.vanadiumPentoxide, 181.878],
  ['sulfuric acid', MOLAR_MASS.sulfuricAcid, 98.072],
  ['potassium dichromate', MOLAR_MASS.potassiumDichromate, 294.181],
  ['oxalic acid dihydrate', molarMass({ H: 6, C: 2, O: 6 }), 126.064],
])('molar mass of %s', (_, value, expected) => {
  expect(value).toBeCloseTo(expected, 3);
});
