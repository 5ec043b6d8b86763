import { describe, expect, test } from 'vitest';
import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import type { AssayResult } from '../../src/assay/result.ts';
import { calibrate } from '../../src/calibration/build.ts';
import type { Standard } from '../../src/calibration/standard.ts';
import type { Side } from '../../src/electrolyte/species.ts';
import { sharedSpectraPresent, sharedStandards, totalOf } from '../support/sharedSpectra.ts';

// Real spectra: Maurice, Quintero, Vera, Electrochimica Acta 2024, 144003 (labels good to 1 to 2 points, no repeats).

const sideOf = (standard: Standard): Side => {
  if (standard.name.startsWith('V2')) return 'negative';
  return standard.name.startsWith('V4') ? 'positive' : 'composite';
};

/** Label of what the side's answer is: state of charge, or mean oxidation state of a composite. */
function labelOf(standard: Standard): number {
  const { V2, V4, V5 } = standard.concentration;
  const total = totalOf(standard);
  const side = sideOf(standard);
  if (side === 'negative') return V2 / total;
  return side === 'positive' ? V5 / total : 3 + V4 / total;
}

function assayed(standard: Standard, calibration: ReturnType<typeof calibrate>): AssayResult {
  return assaySample(
    {
      name: standard.name,
      system: 'left out',
      side: sideOf(standard),
      spectrum: standard.spectrum,
      blank: 'instrument',
      pathLength: standard.pathLength,
      pathUncertainty: null,
      dilution: 1,
      dilutionUncertainty: null,
      temperature: null,
      acid: null,
      takenAt: null,
      scannedAt: null,
      inertGas: null,
      cell: null,
      flask: null,
    },
    { calibration, sha256: 'test', isReference: false },
    { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
  );
}

describe.skipIf(!sharedSpectraPresent)('99 published spectra, 1.22 mol/L left out', () => {
  const all = sharedSpectraPresent ? sharedStandards() : [];
  const leftOut = all.filter((standard) => Math.abs(totalOf(standard) - 1.22) < 0.005);
  const calibration = sharedSpectraPresent
    ? calibrate({
        name: 'two concentrations',
        source: 'Maurice et al. 2024',
        standards: all.filter((standard) => !leftOut.includes(standard)),
        provenance: { tool: 'test', command: 'test', sheetSha256: '' },
      })
    : null;

  test.each([
    ['negative', 0.7],
    ['composite', 0.7],
    ['positive', 0.95],
  ] as const)('%s side: root mean square error at most %s points, none withheld, intervals hold', (side, limit) => {
    const results = leftOut
      .filter((standard) => sideOf(standard) === side)
      .map((standard) => {
        const result = assayed(standard, calibration!);
        const quantity = side === 'composite' ? result.averageOxidationState : result.stateOfCharge;
        return {
          result,
          error: 100 * (quantity.value! - labelOf(standard)),
          uncertainty: 100 * quantity.uncertainty!,
        };
      });
    expect(results).toHaveLength(11);
    expect(results.filter(({ result }) => result.state === 'withheld')).toEqual([]);
    const rms = Math.sqrt(results.reduce((sum, { error }) => sum + error * error, 0) / results.length);
    expect(rms).toBeLessThan(limit);
    const inside = results.filter(({ error, uncertainty }) => Math.abs(error) <= 1.96 * uncertainty).length;
    expect(inside).toBeGreaterThanOrEqual(10);
    const widths = results.map(({ uncertainty }) => 1.96 * uncertainty).sort((a, b) => a - b);
    expect(widths[5]!).toBeLessThan(2.5);
  });

  test('the three pairs tell their side: an exchanged label is seen', () => {
    const positive = leftOut.find((standard) => standard.name.startsWith('V4') && labelOf(standard) === 0.5)!;
    const wrong = assaySample(
      {
        name: 'exchanged',
        system: '',
        side: 'negative',
        spectrum: positive.spectrum,
        blank: 'instrument',
        pathLength: positive.pathLength,
        pathUncertainty: null,
        dilution: 1,
        dilutionUncertainty: null,
        temperature: null,
        acid: null,
        takenAt: null,
        scannedAt: null,
        inertGas: null,
        cell: null,
        flask: null,
      },
      { calibration: calibration!, sha256: 'test', isReference: false },
    );
    expect(wrong.state).toBe('withheld');
    expect(wrong.pair).toBe('V4/V5');
    expect(wrong.findings[0]!.code).toBe('label-disagrees');
    expect(wrong.stateOfCharge.value).toBeNull();
    expect(wrong.unreported!.averageOxidationState.value).toBeCloseTo(4.5, 1);
  });
});
