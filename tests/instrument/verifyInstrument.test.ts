import { describe, expect, test } from 'vitest';
import { bandPosition } from '../../src/bench/instrument/bandPositions.ts';
import { DEFAULT_VERIFICATION, verifyInstrument } from '../../src/bench/instrument/verifyInstrument.ts';
import { wavelengthScale } from '../../src/bench/instrument/wavelengthScale.ts';
import { photometricScale } from '../../src/bench/instrument/photometricScale.ts';
import { strayLight } from '../../src/bench/instrument/strayLight.ts';
import { baselineStability } from '../../src/bench/instrument/baselineStability.ts';
import { cellPaths } from '../../src/bench/instrument/cellPath.ts';
import { opticalResolution } from '../../src/bench/instrument/opticalResolution.ts';
import type { DichromateScan, InstrumentScan } from '../../src/bench/instrument/scans.ts';
import { normalDeviates, scan } from './simulated.ts';

// J. C. Travis et al., J. Phys. Chem. Ref. Data 2005, 34, 41 (from memory, unconfirmed). The four bands of European Pharmacopoeia
// 2.2.25, table 1 (241.15, 287.15, 361.5, 536.3 nm) lie within 0.3 nm of them.
const BANDS = [
  241.12, 249.89, 278.14, 287.22, 333.48, 345.38, 361.26, 385.62, 416.25, 451.43, 467.82, 485.23, 536.56, 640.5,
];

/** Bands of 4 nm half width at the listed places, seen by an axis that is off by `shift` nm and `stretch` nm per 100 nm from 450 nm. */
const holmium =
  (shift: number, noise: () => number = () => 0, stretch = 0) =>
  (nm: number) =>
    BANDS.reduce((sum, band) => {
      const seen = band + shift + (stretch * (band - 450)) / 100;
      return sum + 0.6 * Math.exp(-4 * Math.LN2 * ((nm - seen) / 4) ** 2);
    }, 0.05) +
    0.001 * noise();

describe('wavelength axis', () => {
  test.each([-1.2, -0.2, 0, 0.45, 2.5])('an axis that reads %s nm too long is found', (shift) => {
    const { property } = wavelengthScale([{ test: 'holmium', spectrum: scan('ho', 330, 700, 0.5, holmium(shift)) }]);
    expect(property!.value).toBeCloseTo(shift, 2);
    // List ±0.1/√3 shared by all, bandwidth ±0.1/√3 averaged over 10 bands.
    expect(property!.uncertainty).toBeCloseTo(Math.hypot(0.0577, 0.0577 / Math.sqrt(10)), 2);
  });

  test('limits of European Pharmacopoeia 2.2.25: 1 nm in the ultraviolet, 3 nm in the visible', () => {
    const { tests } = wavelengthScale([{ test: 'holmium', spectrum: scan('ho', 330, 700, 0.5, holmium(1.3)) }]);
    const of = (band: number) => tests.find(({ property }) => property === `${band} nm band`)!;
    expect(of(361.26)).toMatchObject({ conformity: 'failed', limits: [-1, 1] });
    expect(of(536.56)).toMatchObject({ conformity: 'passed', limits: [-3, 3] });
  });

  test("limits of one's own replace those of the pharmacopoeia, and the record says so", () => {
    const spectrum = scan('ho', 330, 700, 0.5, holmium(0.8));
    const limits = { ...DEFAULT_VERIFICATION.limits, wavelength: 0.5, noise: 0.0001 };
    const record = verifyInstrument([{ test: 'holmium', spectrum }], { ...DEFAULT_VERIFICATION, limits });
    expect(record.tests.every(({ conformity }) => conformity === 'failed')).toBe(true);
    expect(record.tests[0]).toMatchObject({ limits: [-0.5, 0.5], limitSource: 'as asked; band positions from memory' });
  });

  test('a band within the guard band of its limit is undecided, not passed', () => {
    const { tests } = wavelengthScale([{ test: 'holmium', spectrum: scan('ho', 330, 700, 0.5, holmium(0.95)) }]);
    expect(tests.find(({ property }) => property === '361.26 nm band')!.conformity).toBe('undecided');
  });

  test('a stretched axis is a finding, because one shift cannot mend it', () => {
    const stretched = scan('ho', 330, 700, 0.5, holmium(0.2, normalDeviates(5), 0.4));
    const { findings } = wavelengthScale([{ test: 'holmium', spectrum: stretched }]);
    expect(findings.map(({ code }) => code)).toEqual(['wavelength-scale-stretched']);
  });

  test('the uncertainty of a band is that of its noise: 68 % of 600 simulated bands within one', () => {
    let inside = 0;
    for (let seed = 1; seed <= 600; seed++) {
      const noise = normalDeviates(seed);
      const truth = 536.56 + (seed % 50) / 100;
      const law = (nm: number) => 0.6 * Math.exp(-4 * Math.LN2 * ((nm - truth) / 4) ** 2) + 0.003 * noise();
      const found = bandPosition(scan('band', 525, 548, 0.5, law), 536.56, 4)!;
      if (Math.abs(found.position - truth) < found.uncertainty) inside += 1;
    }
    // ±3 standard deviations of a binomial count.
    expect(Math.abs(inside / 600 - 0.6827)).toBeLessThan(0.057);
  });

  test('a solution without bands is said, and nothing is passed', () => {
    const outcome = wavelengthScale([{ test: 'holmium', spectrum: scan('water', 330, 700, 0.5, () => 0.05) }]);
    expect(outcome.property).toBeNull();
    expect(outcome.tests).toEqual([]);
    expect(outcome.findings.map(({ code }) => code)).toEqual(['bands-missing']);
  });
});

/** A smooth curve through four known absorbances, flat near each. */
const steps =
  (values: Record<number, number>, factor = 1) =>
  (nm: number) => {
    const nearest = Object.keys(values).reduce((a, b) => (Math.abs(+b - nm) < Math.abs(+a - nm) ? b : a));
    return factor * values[+nearest]!;
  };

describe('absorbance scale', () => {
  const common = {
    concentration: { value: 60, uncertainty: 0.06 },
    pathLength: { value: 1, uncertainty: 0.001 },
  };
  // Pharmacopoeia example: 60.0 mg/L, A(1 %, 1 cm) 124.5, 144.5, 48.6, 107.3.
  const SULFURIC = { 235: 0.747, 257: 0.867, 313: 0.2916, 350: 0.6438 };
  // Burke and Mavrodineanu 1976, nominal values of sealed 60 mg/L solutions.
  const PERCHLORIC = { 235: 0.743, 257: 0.865, 313: 0.29, 350: 0.643 };
  const blank = scan('acid', 225, 440, 1, () => 0.01);
  const dichromate = (
    test: DichromateScan['test'],
    values: Record<number, number>,
    factor: number,
  ): DichromateScan => ({
    test,
    spectrum: scan('dichromate', 225, 440, 1, (nm) => steps(values, factor)(nm) + 0.01),
    blank,
    ...common,
  });

  test.each([
    ['dichromate-sulfuric', SULFURIC],
    ['dichromate-perchloric', PERCHLORIC],
  ] as const)('%s: the published values pass with a scale error of nothing', (test, values) => {
    const { tests, property, findings } = photometricScale([dichromate(test, values, 1)]);
    expect(tests.map(({ conformity }) => conformity)).toEqual(['passed', 'passed', 'passed', 'passed']);
    expect(Math.abs(property!.value)).toBeLessThan(0.002);
    expect(findings).toEqual([]);
  });

  test('A(1 %, 1 cm) is the pharmacopoeia example', () => {
    const { tests } = photometricScale([dichromate('dichromate-sulfuric', SULFURIC, 1)]);
    [124.5, 144.5, 48.6, 107.3].forEach((expected, i) => expect(tests[i]!.value).toBeCloseTo(expected, 6));
  });

  test.each([
    ['dichromate-sulfuric', SULFURIC],
    ['dichromate-perchloric', PERCHLORIC],
  ] as const)('%s: a scale 5 %% high fails and is measured', (test, values) => {
    const { tests, property } = photometricScale([dichromate(test, values, 1.05)]);
    expect(tests.map(({ conformity }) => conformity)).toContain('failed');
    expect(property!.value).toBeCloseTo(0.05, 2);
  });

  test('perchloric values are interpolated, not scaled: 40 mg/L is 0.493 at 235 nm, two thirds of 0.743 would be 0.495', () => {
    const forty = { 235: 0.493, 257: 0.574, 313: 0.193, 350: 0.428 };
    const { tests } = photometricScale([
      { ...dichromate('dichromate-perchloric', forty, 1), concentration: { value: 40, uncertainty: 0 } },
    ]);
    tests.forEach(({ value }) => expect(value).toBeCloseTo(0, 9));
  });

  test('beyond the published concentrations nothing is judged', () => {
    const { tests, property, findings } = photometricScale([
      { ...dichromate('dichromate-perchloric', PERCHLORIC, 1), concentration: { value: 150, uncertainty: 0 } },
    ]);
    expect([tests, property]).toEqual([[], null]);
    expect(findings.map(({ code }) => code)).toEqual(['standard-out-of-range']);
  });

  test('without a blank the answer is wider and says so', () => {
    const without = photometricScale([{ ...dichromate('dichromate-sulfuric', SULFURIC, 1), blank: null }]);
    expect(without.findings.map(({ code }) => code)).toEqual(['no-blank']);
    const withBlank = photometricScale([dichromate('dichromate-sulfuric', SULFURIC, 1)]);
    expect(without.tests[0]!.uncertainty).toBeGreaterThan(3 * withBlank.tests[0]!.uncertainty);
  });
});

describe('stray light', () => {
  // A_obs = −log10((T + s)/(1 + s)): with s = 0.001 a black solution reads 3.000434 (table of photometry texts).
  test('a black solution that reads 3.000434 lets 0.1 % stray light through', () => {
    const noise = normalDeviates(2);
    const dark = scan('nitrite', 330, 380, 0.5, () => -Math.log10(10 ** -3.000434077 * (1 + 0.01 * noise())));
    const cutOff = { test: 'cut-off', name: 'nitrite', opaque: [340, 370], least: 2, limitSource: 'test' } as const;
    const { property, tests } = strayLight([{ ...cutOff, spectrum: dark }]);
    expect(Math.abs(property!.value - 0.001)).toBeLessThan(3 * property!.uncertainty);
    expect(property!.uncertainty).toBeLessThan(5e-6);
    expect(property!.nm).toBe(355);
    expect(tests[0]!.conformity).toBe('passed');
    expect(strayLight([{ ...cutOff, least: 3.2, spectrum: dark }]).tests[0]!.conformity).toBe('failed');
  });

  // The same table: 0.01 % 4.000043, 0.1 % 3.000434, 1 % 2.004321.
  test.each([
    [0.0001, 4.000043427],
    [0.001, 3.000434077],
    [0.01, 2.004321374],
  ])('a share of %s is the limit of absorbance %s', (share, limit) => {
    const dark = scan('filter', 340, 370, 1, () => limit);
    const cutOff = { test: 'cut-off', name: 'filter', opaque: [340, 370], least: 2, limitSource: 'test' } as const;
    expect(strayLight([{ ...cutOff, spectrum: dark }]).property!.value / share).toBeCloseTo(1, 8);
  });

  test('an instrument without numbers there is said, not passed', () => {
    const over = scan('filter', 340, 370, 1, () => NaN);
    const outcome = strayLight([
      { test: 'cut-off', name: 'filter', opaque: [340, 370], least: 2, limitSource: 'test', spectrum: over },
    ]);
    expect(outcome.property).toBeNull();
    expect(outcome.findings.map(({ code }) => code)).toEqual(['stray-light-not-measured']);
  });
});

describe('noise, drift and flatness', () => {
  const blanks = (count: number, noise: number, driftPerHour = 0) =>
    Array.from({ length: count }, (_, i) => {
      const draw = normalDeviates(100 + i);
      return {
        test: 'blank' as const,
        minutes: 10 * i,
        spectrum: scan(
          `blank${i}`,
          400,
          900,
          1,
          (nm) => 0.02 + 2e-6 * (nm - 650) + (driftPerHour * i) / 6 + noise * draw(),
        ),
      };
    });

  test('noise is what the simulation put in, to its own uncertainty', () => {
    const { property, tests } = baselineStability(blanks(6, 0.0004), []);
    const noise = tests.find((test) => test.property === 'noise of one point')!;
    expect(Math.abs(noise.value - 0.0004)).toBeLessThan(3 * noise.uncertainty);
    expect(noise.uncertainty).toBeLessThan(0.00002);
    expect(property.noise!.constant).toBeCloseTo(noise.value, 9);
    expect(property.noise!.shot).toBeNull();
    expect(noise.conformity).toBe('passed');
    const loud = baselineStability(blanks(6, 0.002), []).tests;
    expect(loud.find((test) => test.property === 'noise of one point')!.conformity).toBe('failed');
  });

  test('drift is found per hour and judged with its uncertainty', () => {
    const { tests } = baselineStability(blanks(6, 0.0004, 0.006), []);
    const drift = tests.find(({ property }) => property === 'drift')!;
    expect(Math.abs(drift.value - 0.006)).toBeLessThan(3 * drift.uncertainty);
    expect(drift.conformity).toBe('failed');
  });

  test('offset and slope of repeated blanks become priors', () => {
    const moved = blanks(8, 0.0001).map((blank, i) => {
      const draw = normalDeviates(900 + i);
      const [offset, slope] = [0.003 * draw(), 0.001 * draw()];
      return { ...blank, spectrum: scan('b', 400, 900, 1, (nm) => offset + (slope * (nm - 650)) / 100) };
    });
    const { property } = baselineStability(moved, []);
    expect(property.offsetPrior).toBeGreaterThan(0.0015);
    expect(property.offsetPrior).toBeLessThan(0.006);
    expect(property.slopePrior! / property.offsetPrior!).toBeLessThan(0.8);
  });

  test('two blanks leave the priors alone and say so', () => {
    const { property, findings } = baselineStability(blanks(2, 0.0004), []);
    expect(property.offsetPrior).toBeNull();
    expect(findings.map(({ code }) => code)).toEqual(['blanks-few']);
  });

  test('shot noise shows in repeated scans of a dark sample', () => {
    const repeats = Array.from({ length: 8 }, (_, i) => {
      const draw = normalDeviates(300 + i);
      const absorbance = (nm: number) => (nm - 400) / 250;
      const law = (nm: number) => absorbance(nm) + Math.sqrt(0.0003 ** 2 + 0.0002 ** 2 * 10 ** absorbance(nm)) * draw();
      return { test: 'repeat' as const, name: 'dark', spectrum: scan(`r${i}`, 400, 900, 0.5, law) };
    });
    const { property } = baselineStability(blanks(6, Math.hypot(0.0003, 0.0002)), repeats);
    expect(property.noise!.shot! / 0.0002).toBeCloseTo(1, 1);
    expect(property.noise!.constant / 0.0003).toBeCloseTo(1, 0);
  });

  test('a bump in the baseline is not flat', () => {
    const bumped = blanks(4, 0.0002).map((blank) => ({
      ...blank,
      spectrum: scan('b', 400, 900, 1, (nm) => 0.01 * Math.exp(-(((nm - 656) / 10) ** 2))),
    }));
    const flatness = baselineStability(bumped, []).tests.find(({ property }) => property.startsWith('flatness'))!;
    expect(flatness.conformity).toBe('failed');
  });
});

describe('cells', () => {
  const law = (nm: number) => 0.8 * Math.exp(-(((nm - 600) / 80) ** 2)) + 0.1;

  test('a filled cell against the same solution in a known one', () => {
    const noise = normalDeviates(4);
    const { property } = cellPaths(
      [],
      [
        {
          test: 'filled-cell',
          cell: 'thin',
          spectrum: scan('thin', 450, 750, 1, (nm) => 0.205 * law(nm) + 0.004 + 0.0003 * noise()),
          reference: scan('thick', 450, 750, 1, law),
          referencePath: { value: 1, uncertainty: 0.002 },
        },
      ],
      0.3,
    );
    const [cell] = property;
    expect(cell!.method).toBe('absorber');
    expect(Math.abs(cell!.pathLength - 0.205)).toBeLessThan(2 * cell!.uncertainty);
    // 0.2 % of the reference path is the larger part.
    expect(cell!.uncertainty / cell!.pathLength).toBeGreaterThan(0.002);
    expect(cell!.uncertainty / cell!.pathLength).toBeLessThan(0.0025);
  });

  test('several fillings of one cell: the mean, and the scatter between fillings', () => {
    const fill = (path: number) =>
      ({
        test: 'filled-cell',
        cell: 'thin',
        spectrum: scan('thin', 450, 750, 1, (nm) => path * law(nm)),
        reference: scan('thick', 450, 750, 1, law),
        referencePath: { value: 1, uncertainty: 0 },
      }) as const;
    const { property } = cellPaths([], [fill(0.1), fill(0.11), fill(0.105)], 0.3);
    expect(property).toHaveLength(1);
    expect(property[0]!.pathLength).toBeCloseTo(0.105, 6);
    expect(property[0]!.uncertainty).toBeCloseTo(0.005, 6);
  });

  test('too dark in the thick cell: said, not fitted', () => {
    const { property, findings } = cellPaths(
      [],
      [
        {
          test: 'filled-cell',
          cell: 'thin',
          spectrum: scan('thin', 450, 750, 1, law),
          reference: scan('thick', 450, 750, 1, (nm) => 10 * law(nm) + 1),
          referencePath: { value: 1, uncertainty: 0 },
        },
      ],
      0.3,
    );
    expect([property, findings.map(({ code }) => code)]).toEqual([[], ['reference-not-comparable']]);
  });
});

// Pharmacopoeia: 0.02 % toluene in hexane, A(269)/A(266) not less than 1.5.
test.each([
  [1.62, 'passed'],
  [1.4, 'failed'],
])('optical resolution: a ratio of %s has %s', (ratio, conformity) => {
  const law = (nm: number) => 0.3 * (1 + ((ratio - 1) / 2) * (1 - Math.cos((Math.PI * (nm - 266)) / 3)));
  const [outcome] = opticalResolution(
    [{ test: 'toluene-hexane', spectrum: scan('toluene', 262, 272, 0.1, law) }],
    0.0005,
  ).tests;
  expect(outcome!.value).toBeCloseTo(ratio, 6);
  expect(outcome!.conformity).toBe(conformity);
});

describe('the whole check', () => {
  const scans: InstrumentScan[] = [
    { test: 'holmium', spectrum: scan('ho', 330, 700, 0.5, holmium(0.4)) },
    ...Array.from({ length: 4 }, (_, i) => {
      const draw = normalDeviates(i + 1);
      return { test: 'blank' as const, minutes: 5 * i, spectrum: scan(`b${i}`, 400, 900, 1, () => 0.0004 * draw()) };
    }),
  ];

  test('one record: what was scanned is there, what was not is null and said', () => {
    const record = verifyInstrument(scans);
    expect(record.schema).toBe('tankhue/instrument/1');
    expect(record.state).toBe('passed');
    expect(record.wavelengthShift!.value).toBeCloseTo(0.4, 2);
    expect(record.strayLight).toBeNull();
    expect(record.findings.map(({ code }) => code)).toEqual(['not-tested']);
    expect(record.findings[0]!.message).toContain('potassium dichromate');
    expect(record.inputs.map(({ file }) => file)).toEqual(['ho.csv', 'b0.csv', 'b1.csv', 'b2.csv', 'b3.csv']);
  });

  test('the record survives its file', () => {
    const record = verifyInstrument(scans);
    expect(JSON.parse(JSON.stringify(record))).toEqual(record);
  });

  test('one failed test fails the instrument', () => {
    const shifted = scans.map((each) =>
      each.test === 'holmium' ? { ...each, spectrum: scan('ho', 330, 700, 0.5, holmium(1.5)) } : each,
    );
    expect(verifyInstrument(shifted).state).toBe('failed');
  });

  test('no scans are refused', () => {
    expect(() => verifyInstrument([])).toThrow(expect.objectContaining({ code: 'no-scans' }));
  });
});
