import { describe, expect, test } from 'vitest';
import { calibrate } from '../../src/calibration/build.ts';
import { dealToPairs, type Standard } from '../../src/calibration/standard.ts';
import { inventedStandards } from '../support/inventedBench.ts';

const provenance = { tool: 'test', command: 'test', sheetSha256: '' };
const build = (standards: readonly Standard[], more: object = {}) =>
  calibrate({ name: 'x', source: '', standards, provenance, ...more });
const ivv = inventedStandards(5).filter((standard) => standard.name.startsWith('V4/V5'));
const codes = (calibration: ReturnType<typeof build>) => calibration.findings.map((finding) => finding.code);

describe('calibrate', () => {
  test('finds the complex, its constant within the interval, and holds the label errors', () => {
    const calibration = build(ivv);
    const [pair] = calibration.pairs;
    expect(pair!.model.associations.map((association) => association.name)).toContain('V4·V5');
    const constant = pair!.constants.find((one) => one.association === 'V4·V5')!;
    // Truth 0.9 L/mol; K and the spectrum of the complex trade against each other.
    expect(constant.value).toBeGreaterThan(0.75);
    expect(constant.value).toBeLessThan(1.05);
    expect(pair!.validation[0]!.share.rmse).toBeLessThan(0.002);
  });

  test('order of standards does not matter', () => {
    const one = build(ivv).pairs[0]!;
    const two = build(ivv.toReversed()).pairs[0]!;
    expect(two.constants[0]!.value).toBeCloseTo(one.constants[0]!.value, 3);
    expect(two.model.spectra[2]![40]!).toBeCloseTo(one.model.spectra[2]![40]!, 0);
  });

  test('a standard with swapped label is named with its reason and not dropped', () => {
    const spoiled = ivv.map((standard, i) =>
      i === 8
        ? {
            ...standard,
            concentration: { ...standard.concentration, V4: standard.concentration.V5, V5: standard.concentration.V4 },
          }
        : standard,
    );
    const calibration = build(spoiled);
    const doubt = calibration.findings.find(
      (finding) => finding.code === 'standard-in-doubt' && finding.message.includes(ivv[8]!.name),
    )!;
    expect(doubt.message).toMatch(/swapped/);
    expect(calibration.standards.some((standard) => standard.name === ivv[8]!.name)).toBe(true);
  });

  test('a standard from another cell is named', () => {
    const spoiled = ivv.map((standard, i) =>
      i === 10
        ? {
            ...standard,
            spectrum: { ...standard.spectrum, absorbance: standard.spectrum.absorbance.map((a) => 1.1 * a) },
          }
        : standard,
    );
    const messages = build(spoiled).findings.map((finding) => finding.message);
    expect(messages.some((message) => message.includes(ivv[10]!.name) && message.includes('wrong cell'))).toBe(true);
  });

  test('one total concentration: self-association cannot be told, and that is said', () => {
    const single = ivv.filter((standard) => standard.name.includes(' 1.5 '));
    const calibration = build(single);
    expect(codes(calibration)).toContain('cannot-tell-association');
    expect(codes(calibration)).toContain('validation-optimistic');
    expect(calibration.pairs[0]!.model.associations.map((association) => association.name)).not.toContain('2V5');
  });

  test('two compositions: a complex cannot be fitted, in words', () => {
    const ends = ivv.filter((standard) => / 0\.(02|98)$/.test(standard.name));
    const message = build(ends).findings.find((finding) => finding.code === 'cannot-tell-association')!.message;
    expect(message).toContain('three compositions between V4 and V5 are needed to fit a complex; 2 found');
  });

  test('left out by decision is recorded', () => {
    const calibration = build(ivv, { without: [ivv[3]!.name] });
    expect(codes(calibration)).toContain('left-out-by-decision');
    expect(calibration.standards.some((standard) => standard.name === ivv[3]!.name)).toBe(false);
  });

  test('a check standard is predicted and not fitted', () => {
    const checked = ivv.map((standard, i) => (i === 5 ? { ...standard, role: 'check' as const } : standard));
    const calibration = build(checked);
    const record = calibration.standards.find((standard) => standard.name === ivv[5]!.name)!;
    expect(record.role).toBe('check');
    expect(record.leverage).toBe(0);
    expect(calibration.pairs[0]!.leftOut.some((one) => one.name === ivv[5]!.name)).toBe(false);
  });

  test('a standard too dark for the photometer is set aside by name', () => {
    const dark = ivv.map((standard, i) =>
      i === 2
        ? {
            ...standard,
            spectrum: { ...standard.spectrum, absorbance: standard.spectrum.absorbance.map((a) => a + 2) },
          }
        : standard,
    );
    const finding = build(dark).findings.find((one) => one.code === 'over-ceiling')!;
    expect(finding.message).toContain(ivv[2]!.name);
  });

  test.each([
    ['repeated names', () => build([ivv[0]!, ivv[0]!]), 'name-repeats'],
    ['an unknown name to leave out', () => build(ivv, { without: ['nobody'] }), 'unknown-standard'],
    ['one composition', () => build(ivv.filter((standard) => standard.name.endsWith(' 0.5'))), 'too-few-compositions'],
    [
      'states that cannot coexist',
      () => build([{ ...ivv[0]!, concentration: { V2: 0.5, V3: 0, V4: 0.5, V5: 0 } }]),
      'cannot-coexist',
    ],
    ['no vanadium', () => build([{ ...ivv[0]!, concentration: { V2: 0, V3: 0, V4: 0, V5: 0 } }]), 'no-vanadium'],
    ['a range nobody covers', () => build(ivv, { grid: { from: 200, to: 900 } }), 'axis-outside'],
  ])('%s: refused', (_, make, code) => {
    expect(make).toThrow(expect.objectContaining({ code }));
  });
});

describe('dealToPairs', () => {
  test('a pure state goes with the mixtures it was measured beside, alone it serves both pairs', () => {
    const pure = { ...ivv[0]!, name: 'pure V4', preparation: null, concentration: { V2: 0, V3: 0, V4: 1, V5: 0 } };
    const lonely = { ...pure, spectrum: { ...pure.spectrum, origin: { file: 'elsewhere', column: '', sha256: '' } } };
    const beside = { ...pure, preparation: ivv[0]!.preparation };
    expect(dealToPairs([...ivv, beside]).get('V4/V5')!.length).toBe(ivv.length + 1);
    expect(dealToPairs([...ivv, beside]).get('V3/V4')!.length).toBe(0);
    expect(dealToPairs([...ivv, lonely]).get('V3/V4')!.length).toBe(1);
  });
});
