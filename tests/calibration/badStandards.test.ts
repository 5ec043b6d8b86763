import { describe, expect, test } from 'vitest';
import { calibrate, type CalibrationRequest } from '../../src/calibration/build.ts';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { parseCalibration, serialiseCalibration } from '../../src/calibration/file.ts';
import { totalVanadiumOf, type Standard } from '../../src/calibration/standard.ts';
import { totalBlocks } from '../../src/calibration/totalBlocks.ts';
import { inventedStandards } from '../support/inventedBench.ts';

// Standards of known truth (0.3 % in concentration, 0.4 % in path), spoiled one way at a time. Wide means keep the run short.
const build = (standards: readonly Standard[], more: Partial<CalibrationRequest> = {}): Calibration =>
  calibrate({
    name: 'x',
    source: '',
    standards,
    grid: { step: 20 },
    provenance: { tool: 'test', command: 'test', sheetSha256: '' },
    ...more,
  });
const sound = inventedStandards(5).filter((standard) => standard.name.startsWith('V2/V3'));
const at = (total: number, share: number): Standard => sound.find(({ name }) => name === `V2/V3 ${total} ${share}`)!;
const spoiled = (change: (standard: Standard) => Standard | null): Standard[] =>
  sound.map((standard) => change(standard) ?? standard);
const withAbsorbance = (standard: Standard, change: (absorbance: number) => number): Standard => ({
  ...standard,
  spectrum: { ...standard.spectrum, absorbance: standard.spectrum.absorbance.map(change) },
});
const withSpectrumOf = (standard: Standard, other: Standard): Standard => ({ ...standard, spectrum: other.spectrum });
const messages = (calibration: Calibration, code: string): string[] =>
  calibration.findings.filter((finding) => finding.code === code).map(({ message }) => message);
const doubted = (calibration: Calibration): string[] =>
  calibration.standards.filter(({ doubt }) => doubt !== null).map(({ name }) => name);

describe('a standard that disagrees', () => {
  test('sound standards: nobody is accused, nothing is found', () => {
    const calibration = build(sound);
    expect(doubted(calibration)).toEqual([]);
    expect(calibration.findings).toEqual([]);
  });

  test('two bottles swapped: both are named with each other, their neighbours are not', () => {
    const [one, two] = [at(1.2, 0.34), at(1.2, 0.66)];
    const calibration = build(
      spoiled((standard) =>
        standard === one ? withSpectrumOf(one, two) : standard === two ? withSpectrumOf(two, one) : null,
      ),
    );
    expect(doubted(calibration)).toEqual([one.name, two.name]);
    expect(messages(calibration, 'standard-in-doubt')[0]).toContain(
      `its label and that of ${two.name} seem to be swapped`,
    );
    expect(messages(calibration, 'standard-in-doubt')[1]).toContain(
      `its label and that of ${one.name} seem to be swapped`,
    );
  });

  test('two bottles of one share and different totals swapped', () => {
    const [one, two] = [at(1.2, 0.34), at(1.9, 0.34)];
    const calibration = build(
      spoiled((standard) =>
        standard === one ? withSpectrumOf(one, two) : standard === two ? withSpectrumOf(two, one) : null,
      ),
    );
    expect(doubted(calibration)).toEqual([one.name, two.name]);
    expect(messages(calibration, 'standard-in-doubt')[0]).toContain(`that of ${two.name} seem to be swapped`);
  });

  test('a forgotten blank is told by its size', () => {
    const bad = at(1.2, 0.34);
    const calibration = build(spoiled((standard) => (standard === bad ? withAbsorbance(bad, (a) => a + 0.05) : null)));
    expect(doubted(calibration)).toEqual([bad.name]);
    expect(messages(calibration, 'standard-in-doubt')[0]).toMatch(
      /its baseline lies \+0\.0(49|50|51) off: wrong blank/,
    );
  });

  test('another cell for one standard', () => {
    const bad = at(1.7, 0.5);
    const calibration = build(spoiled((standard) => (standard === bad ? withAbsorbance(bad, (a) => 1.1 * a) : null)));
    expect(doubted(calibration)).toEqual([bad.name]);
    expect(messages(calibration, 'standard-in-doubt')[0]).toMatch(
      /it holds 1(09|10) % of the vanadium on its label: wrong cell/,
    );
  });

  test('another cell for a whole preparation: all of it and nobody else', () => {
    const calibration = build(
      spoiled((standard) => (totalVanadiumOf(standard) === 1.5 ? withAbsorbance(standard, (a) => 0.5 * a) : null)),
    );
    expect(doubted(calibration)).toEqual(sound.filter((one) => totalVanadiumOf(one) === 1.5).map(({ name }) => name));
    expect(messages(calibration, 'standard-in-doubt')[0]).toContain('it and 6 more of V2/V3 1.5 hold another total');
  });

  test.each([
    ['oxidised', 0.04, 'partly oxidised before the scan, or mixed wrong'],
    ['mixed wrong towards the reduced side', -0.04, 'mixed wrong'],
  ])('%s: the label says %d less than the bottle', (_, points, reason) => {
    const bad = at(1.2, 0.5);
    const moved = points * totalVanadiumOf(bad);
    const concentration = { ...bad.concentration, V2: bad.concentration.V2 + moved, V3: bad.concentration.V3 - moved };
    const calibration = build(spoiled((standard) => (standard === bad ? { ...bad, concentration } : null)));
    expect(doubted(calibration)).toEqual([bad.name]);
    expect(messages(calibration, 'standard-in-doubt')[0]!.endsWith(`: ${reason}`)).toBe(true);
    const record = calibration.standards.find(({ name }) => name === bad.name)!;
    expect(record.shareDoubt).toBeCloseTo(points, 2);
  });

  test('a check standard that is off is told, and does not touch the fit', () => {
    const bad = at(1.2, 0.34);
    const calibration = build(
      spoiled((standard) => (standard === bad ? { ...withSpectrumOf(bad, at(1.2, 0.5)), role: 'check' } : null)),
    );
    expect(messages(calibration, 'check-standard-out')[0]).toMatch(
      /V2\/V3 1\.2 0\.34 reads 1[56]\.\d points of V3 off/,
    );
    expect(calibration.pairs[0]!.validation[0]!.share.rmse).toBeLessThan(0.002);
  });
});

describe('a sheet that cannot be right', () => {
  test('one spectrum under two names', () => {
    const calibration = build(
      spoiled((standard) => (standard === at(0.9, 0.5) ? withSpectrumOf(standard, at(0.9, 0.66)) : null)),
    );
    expect(messages(calibration, 'spectrum-repeats')).toEqual([
      'standards V2/V3 0.9 0.5 and V2/V3 0.9 0.66 have the same spectrum, value by value',
    ]);
  });

  test('concentrations that do not add up to what the preparation holds', () => {
    const bad = at(0.9, 0.5);
    const concentration = { ...bad.concentration, V3: 0.55 };
    const calibration = build(spoiled((standard) => (standard === bad ? { ...bad, concentration } : null)));
    expect(messages(calibration, 'totals-differ')).toEqual([
      'standard V2/V3 0.9 0.5 adds up to 1.000 mol/L, the others of preparation V2/V3 0.9 to 0.9000',
    ]);
  });

  test('a preparation of several totals is no mistake', () => {
    const calibration = build(sound.map((standard) => ({ ...standard, preparation: 'one stock' })));
    expect(messages(calibration, 'totals-differ')).toEqual([]);
    expect(messages(calibration, 'validation-optimistic')[0]).toContain('all standards are of one preparation');
  });

  test('temperatures that spread', () => {
    const warm = spoiled((standard) => (standard === at(1.9, 0.98) ? { ...standard, temperature: 308.15 } : null));
    expect(messages(build(warm), 'temperatures-spread')).toEqual(['standards were scanned between 25.0 and 35.0 °C']);
  });

  test('cells of two paths that disagree, and that agree', () => {
    const inTwoCells = (ratio: number) =>
      sound.map((standard, i) => {
        const unstated = { ...standard, pathUncertainty: null };
        return i % 2 ? { ...withAbsorbance(unstated, (a) => ratio * a), pathLength: 0.05 } : unstated;
      });
    expect(messages(build(inTwoCells(0.52)), 'cells-disagree')[0]).toMatch(
      /0\.5 mm reads [34]\.\d % more vanadium than 1 mm/,
    );
    const agreeing = build(inTwoCells(0.5));
    expect(messages(agreeing, 'cells-disagree')).toEqual([]);
    expect(messages(agreeing, 'mixed-cells')).toHaveLength(1);
  });
});

describe('a design that says little', () => {
  test('shares close together: the gap is named', () => {
    const close = sound.filter(({ name }) => name.endsWith(' 0.34') || name.endsWith(' 0.5'));
    expect(messages(build(close), 'design-weak')).toEqual([
      'V2/V3: no standard below 34 % V(III); no standard above 50 % V(III)',
    ]);
  });

  test('three standards: done, marked, and with the uncertainty that is assumed', () => {
    const calibration = build(sound.slice(0, 3));
    expect(messages(calibration, 'not-validated')[0]).toContain('3 standards leave none to validate with');
    expect(calibration.pairs[0]!.betweenGroup.share).toBeGreaterThanOrEqual(0.01);
    expect(parseCalibration(serialiseCalibration(calibration))).toEqual(calibration);
  });

  test('two standards: refused in words', () => {
    expect(() => build([at(0.9, 0.02), at(0.9, 0.98)])).toThrow(
      expect.objectContaining({
        code: 'too-few-compositions',
        message: '3 standards of V2 and V3 are needed, so that one can contradict the others; 2 found',
      }),
    );
  });

  test('every composition the same: refused in words', () => {
    expect(() => build(sound.filter(({ name }) => name.endsWith(' 0.5')))).toThrow(
      expect.objectContaining({ code: 'too-few-compositions' }),
    );
  });

  test('a pair that cannot be done does not stop the others', () => {
    const positive = inventedStandards(5).filter(({ name }) => name.startsWith('V4/V5') && name.endsWith(' 0.5'));
    const calibration = build([...sound, ...positive]);
    expect(calibration.pairs.map(({ pair }) => pair)).toEqual(['V2/V3']);
    expect(messages(calibration, 'too-few-compositions')[0]).toContain('V4/V5 could not be calibrated');
  });
});

describe('darkness', () => {
  test('everything too dark: refused by name of the cause', () => {
    expect(() => build(sound.map((standard) => withAbsorbance(standard, (a) => a + 3)))).toThrow(
      expect.objectContaining({ code: 'over-ceiling' }),
    );
  });

  test('a range where many are too dark is left out and said', () => {
    const dark = sound.map((standard) => ({
      ...standard,
      spectrum: {
        ...standard.spectrum,
        absorbance: standard.spectrum.absorbance.map((a, i) => (standard.spectrum.wavelength[i]! < 475 ? 9 : a)),
      },
    }));
    const calibration = build(dark);
    expect(messages(calibration, 'range-cut')[0]).toMatch(
      /^V2\/V3: 3 of 27 wavelengths are not used.*: 430 to 470 nm$/,
    );
    expect(calibration.pairs[0]!.model.wavelength[0]).toBe(490);
  });
});

describe('totalBlocks', () => {
  test('what weighing scatters is one level, what is 5 % apart is two', () => {
    expect(totalBlocks([1.6, 1.62, 1.57, 0.9, 1.83])).toEqual([
      '1.57 to 1.62 mol/L',
      '1.57 to 1.62 mol/L',
      '1.57 to 1.62 mol/L',
      '0.900 mol/L',
      '1.83 mol/L',
    ]);
  });

  test('scatter of one per cent makes no group of every standard', () => {
    const scattered = sound.map((standard, i) => {
      const factor = 1 + 0.004 * Math.sin(7 * i);
      const { V2, V3 } = standard.concentration;
      return {
        ...standard,
        preparation: null,
        concentration: { ...standard.concentration, V2: V2 * factor, V3: V3 * factor },
      };
    });
    expect(build(scattered).pairs[0]!.validation).toHaveLength(6);
  });
});
