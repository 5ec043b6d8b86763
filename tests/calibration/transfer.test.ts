import { beforeAll, describe, expect, test } from 'vitest';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { extensionFindings, requireOldStandards } from '../../src/calibration/extend.ts';
import { transferCalibration } from '../../src/calibration/transfer.ts';
import { speciesOfPair } from '../../src/electrolyte/species.ts';
import { makeSpectrum } from '../../src/spectrum/spectrum.ts';
import {
  absorbanceOf,
  assayInvented,
  chance,
  inventedCalibration,
  inventedSample,
  inventedStandards,
  PATH,
  WAVELENGTH,
} from '../support/inventedBench.ts';

let old: Calibration;
beforeAll(() => {
  old = inventedCalibration(31);
}, 60_000);

/** Standards on a photometer that reads 1.5 nm long, with cells 3 % longer and 4 mA of offset. */
function onNewPhotometer(shares: readonly number[]) {
  const random = chance(8);
  const [low, high] = speciesOfPair('V2/V3');
  return shares.map((share) => {
    const lower = 1.5 * (1 - share);
    const higher = 1.5 * share;
    const absorbance = absorbanceOf('V2/V3', lower, higher, 1.03 * PATH['V2/V3'], random, {
      shift: 1.5,
      offset: 0.004,
    });
    const name = `new ${share}`;
    return {
      name,
      spectrum: makeSpectrum(name, WAVELENGTH, absorbance, { file: 'new.csv', column: name, sha256: 'n' }),
      pathLength: PATH['V2/V3'],
      pathUncertainty: null,
      dilution: 1,
      temperature: null,
      concentration: { V2: 0, V3: 0, V4: 0, V5: 0, [low]: lower, [high]: higher },
      concentrationUncertainty: null,
      preparation: null,
      role: 'calibration' as const,
    };
  });
}

describe('transferCalibration', () => {
  test('finds what differs between two photometers and its scale is no longer doubted', () => {
    const { calibration, transfers } = transferCalibration(old, onNewPhotometer([0.1, 0.3, 0.5, 0.7, 0.9]));
    const [transfer] = transfers;
    expect(transfer!.wavelengthShift).toBeCloseTo(1.5, 1);
    expect(transfer!.scale).toBeCloseTo(1.03, 2);
    expect(transfer!.offset).toBeCloseTo(0.004, 3);
    expect(transfer!.rmseAfter).toBeLessThan(0.003);
    // The old calibration doubts the new scale. The transferred one does not; the offset is left to the blank, whose business it is.
    const [fresh] = onNewPhotometer([0.42]);
    const sample = inventedSample('V2/V3', fresh!.spectrum.absorbance);
    const codesWith = (one: Calibration) => assayInvented(sample, one).findings.map((finding) => finding.code);
    expect(codesWith(old)).toContain('wavelength-off');
    expect(codesWith(calibration)).toEqual(['baseline-off']);
    expect(calibration.findings.some((finding) => finding.code === 'transferred')).toBe(true);
    expect(calibration.findings.filter((finding) => finding.code === 'not-transferred')).toHaveLength(2);
  });

  test('two standards are too few', () => {
    expect(() => transferCalibration(old, onNewPhotometer([0.2, 0.8]))).toThrow(
      expect.objectContaining({ code: 'too-few-compositions' }),
    );
  });
});

describe('extending', () => {
  test('asks for the old standards, unchanged', () => {
    const standards = inventedStandards(31);
    expect(() => requireOldStandards(old, standards)).not.toThrow();
    expect(() => requireOldStandards(old, standards.slice(1))).toThrow(
      expect.objectContaining({ code: 'standard-missing' }),
    );
    const [first, ...rest] = standards;
    const changed = {
      ...first!,
      spectrum: { ...first!.spectrum, origin: { ...first!.spectrum.origin, sha256: 'other' } },
    };
    expect(() => requireOldStandards(old, [changed, ...rest])).toThrow(
      expect.objectContaining({ code: 'standard-changed' }),
    );
  });

  test('says what the new standards changed', () => {
    const [finding] = extensionFindings(old, old);
    expect(finding!.message).toMatch(/left-out error .* points \(35 standards\) before/);
  });
});
