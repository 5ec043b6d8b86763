import { beforeAll, describe, expect, test } from 'vitest';
import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import { combineReplicates } from '../../src/assay/combine.ts';
import type { AssayResult } from '../../src/assay/result.ts';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { makeSpectrum } from '../../src/spectrum/spectrum.ts';
import {
  absorbanceOf,
  assayInvented,
  chance,
  inventedCalibration,
  inventedSample,
  WAVELENGTH,
} from '../support/inventedBench.ts';

const random = chance(99);
let calibration: Calibration;
beforeAll(() => {
  calibration = inventedCalibration(21);
}, 60_000);

function filling(
  column: string,
  lower: number,
  higher: number,
  path = 0.1,
  dilution = 1,
  cell: string | null = null,
): AssayResult {
  const absorbance = absorbanceOf(
    'V2/V3',
    lower / dilution,
    higher / dilution,
    path * (1 + 0.004 * random.normal()),
    random,
  );
  return assayInvented(
    inventedSample('V2/V3', absorbance, {
      name: column,
      spectrum: makeSpectrum(column, WAVELENGTH, absorbance, { file: 'f.csv', column, sha256: 'f' }),
      pathLength: path,
      pathUncertainty: 0.004 * path,
      dilution,
      cell,
    }),
    calibration,
  );
}
const still = (assay: AssayResult) => ({ assay, seconds: null });

describe('combineReplicates', () => {
  test('two fillings of two cells know the total better than one, of one cell they do not', () => {
    const apart = combineReplicates('x', [still(filling('a', 0.8, 0.8)), still(filling('b', 0.8, 0.8))])!;
    const same = combineReplicates('x', [
      still(filling('a', 0.8, 0.8, 0.1, 1, 'cell 7')),
      still(filling('b', 0.8, 0.8, 0.1, 1, 'cell 7')),
    ])!;
    const one = filling('a', 0.8, 0.8);
    expect(apart.totalVanadium.uncertainty!).toBeLessThan(0.85 * one.totalVanadium.uncertainty!);
    expect(same.totalVanadium.uncertainty!).toBeGreaterThan(0.9 * one.totalVanadium.uncertainty!);
    expect(apart.combinedFrom).toEqual(['a', 'b']);
    expect(apart.averageOxidationState.value).toBeCloseTo(2.5, 2);
  });

  test('the same spectrum twice counts once', () => {
    const one = filling('a', 0.8, 0.8);
    const combined = combineReplicates('x', [still(one), still(one)])!;
    expect(combined.findings[0]!.code).toBe('not-independent');
    expect(combined.totalVanadium.uncertainty).toBe(one.totalVanadium.uncertainty);
  });

  test('fillings that differ by chemistry disagree, and far apart withhold', () => {
    const combined = combineReplicates('x', [still(filling('a', 0.9, 0.7)), still(filling('b', 0.7, 0.9))])!;
    expect(combined.state).toBe('withheld');
    expect(combined.findings.map((finding) => finding.code)).toContain('replicates-disagree');
    expect(combined.stateOfCharge.value).toBeNull();
    expect(combined.unreported!.averageOxidationState.value).toBeCloseTo(2.5, 1);
  });

  test('replicates of one truth disagree in at most a few of a hundred', () => {
    let alarms = 0;
    for (let run = 0; run < 100; run++) {
      const combined = combineReplicates('x', [still(filling('a', 0.8, 0.8)), still(filling('b', 0.8, 0.8))])!;
      alarms += Number(combined.findings.some((finding) => finding.code === 'replicates-disagree'));
    }
    expect(alarms).toBeLessThanOrEqual(4);
  });

  test('V(II) that falls from scan to scan is extrapolated to the time of sampling', () => {
    // 0.2 points a minute: 0.0032 mol/L in 60 s of 1.6 mol/L.
    const scans = [60, 180, 300, 420].map((seconds) => {
      const lost = (0.0032 * seconds) / 60;
      return { assay: filling(`t${seconds}`, 0.8 - lost, 0.8 + lost), seconds };
    });
    const combined = combineReplicates('x', scans)!;
    expect(combined.findings.map((finding) => finding.code)).toContain('air-exposure');
    expect(combined.state).toBe('caution');
    expect(Math.abs(combined.stateOfCharge.value! - 0.5)).toBeLessThan(2.5 * combined.stateOfCharge.uncertainty!);
    const still = scans.map(({ seconds }) => ({ assay: filling(`s${seconds}`, 0.8, 0.8), seconds }));
    expect(combineReplicates('x', still)!.findings.map((finding) => finding.code)).not.toContain('air-exposure');
  });
});

describe('precision of repeated fillings', () => {
  test('widens what the budget promises too much, and leaves a wider budget alone', () => {
    const absorbance = absorbanceOf('V2/V3', 0.8, 0.8, 0.1, random);
    const sample = inventedSample('V2/V3', absorbance);
    const inUse = { calibration, sha256: 'x', isReference: false };
    const plain = assaySample(sample, inUse);
    const wide = assaySample(sample, inUse, {
      ...DEFAULT_ASSAY_OPTIONS,
      precision: { stateOfCharge: 0.01, totalVanadium: 0 },
    });
    const narrow = assaySample(sample, inUse, {
      ...DEFAULT_ASSAY_OPTIONS,
      precision: { stateOfCharge: 1e-6, totalVanadium: 1e-6 },
    });
    expect(wide.stateOfCharge.uncertainty!).toBeGreaterThan(0.0099);
    expect(wide.budget[0]!.source).toBe('repeatability');
    expect(narrow.stateOfCharge.uncertainty).toBe(plain.stateOfCharge.uncertainty);
  });
});
