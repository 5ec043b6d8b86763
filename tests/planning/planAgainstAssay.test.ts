import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import { designCuvette, type PhotometerTraits } from '../../src/bench/planning/cuvetteDesign.ts';
import { measurementBudget, uncertaintyAfter } from '../../src/bench/planning/measurementBudget.ts';
import { measurementModelOf } from '../../src/bench/planning/measurementModel.ts';
import { parseCalibration } from '../../src/calibration/file.ts';
import type { Side } from '../../src/electrolyte/species.ts';
import { makeSpectrum } from '../../src/spectrum/spectrum.ts';

const calibration = parseCalibration(readFileSync('calibration/reference.json', 'utf8'));

// A photometer that adds nothing to what the calibration already counts.
const NOTHING_ADDED: PhotometerTraits = {
  noise: { constant: 0, shot: 0 },
  pointsAveraged: 1,
  strayLight: 0,
  priors: DEFAULT_ASSAY_OPTIONS.priors,
  ceiling: DEFAULT_ASSAY_OPTIONS.ceiling,
};

// The plan's uncertainty is that which the assay reports for a spectrum as planned: same calibration, noise, modes, leverage,
// between-group variance, path and dilution. 3 %: the assay linearises about its own estimate.
test.each([
  ['negative', 'V2/V3', 0.1, 1, 0.7],
  ['negative', 'V2/V3', 1, 20, 0.3],
  ['composite', 'V3/V4', 0.02, 1, 0.5],
  ['positive', 'V4/V5', 0.01, 1, 0.5],
  ['positive', 'V4/V5', 0.02, 1, 0.2],
  ['positive', 'V4/V5', 1, 20, 0.6],
] as [Side, string, number, number, number][])(
  '%s %s in %s cm at 1:%s, share %s: the plan is what the assay reports',
  (side, pair, pathLength, dilution, share) => {
    const pairCalibration = calibration.pairs.find((each) => each.pair === pair)!;
    const model = measurementModelOf(pairCalibration);
    const [lower, higher] = [(1.6 * (1 - share)) / dilution, (1.6 * share) / dilution];
    const cuvette = { lower, higher, pathLength, pathUncertainty: 0.01, fillingScatter: 0 };
    const design = designCuvette(model, cuvette, NOTHING_ADDED);
    const planned = uncertaintyAfter(measurementBudget(model, design, cuvette, dilution === 1 ? 0 : 0.003)!, 1);
    const result = assaySample(
      {
        name: 'planned',
        system: '',
        side,
        spectrum: makeSpectrum('planned', model.wavelength, design.absorbance),
        blank: 'given',
        pathLength,
        pathUncertainty: 0.01 * pathLength,
        dilution,
        dilutionUncertainty: 0.003,
        temperature: null,
        acid: null,
        takenAt: null,
        scannedAt: null,
        inertGas: null,
        cell: null,
        flask: null,
      },
      { calibration, sha256: 'test', isReference: false },
    );
    const numbers = result.unreported ?? result;
    expect(Math.abs(planned.stateOfCharge / numbers.averageOxidationState.uncertainty! - 1)).toBeLessThan(0.03);
    expect(Math.abs((planned.totalVanadium * 1.6) / numbers.totalVanadium.uncertainty! - 1)).toBeLessThan(0.03);
  },
);
