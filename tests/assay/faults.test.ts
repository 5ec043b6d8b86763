import { beforeAll, describe, expect, test } from 'vitest';
import type { AssayResult } from '../../src/assay/result.ts';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { PAIRS, speciesOfPair, type Pair } from '../../src/electrolyte/species.ts';
import {
  absorbanceOf,
  assayInvented,
  chance,
  inventedCalibration,
  inventedSample,
  PATH,
  type Fault,
} from '../support/inventedBench.ts';

// The table of detection against false alarm: invented truth, three calibrations, every fault at random size and sign.

const random = chance(20261);
const either = () => (random.uniform() < 0.5 ? -1 : 1);
const FAULTS: Readonly<Record<string, () => Fault>> = {
  offset: () => ({ offset: either() * (0.01 + 0.02 * random.uniform()) }),
  scatter: () => ({ scatter: 0.01 + 0.03 * random.uniform() }),
  'shift of 1 nm and more': () => ({ shift: either() * (1 + random.uniform()) }),
  bubble: () => ({ bubble: 0.01 + 0.05 * random.uniform() }),
  'stray light': () => ({ stray: 0.002 + 0.01 * random.uniform() }),
  'wrong path': () => ({ path: random.uniform() < 0.5 ? 0.8 : 1.25 }),
  'wrong blank': () => ({ offset: 0.006, water: 0.02 }),
};
const RUNS = 25;

/** Share of the higher species, reported or kept aside; NaN where another pair was taken. */
function shareOf(result: AssayResult, pair: Pair): { share: number; uncertainty: number } {
  const numbers = result.unreported ?? result;
  const [lower, higher] = speciesOfPair(pair);
  const low = numbers.concentration[lower]?.value ?? NaN;
  const high = numbers.concentration[higher]?.value ?? NaN;
  return { share: high / (low + high), uncertainty: numbers.averageOxidationState.uncertainty! };
}

describe('spoiled and sound spectra', () => {
  let calibrations: Calibration[] = [];
  beforeAll(() => {
    calibrations = [11, 12, 13].map(inventedCalibration);
  }, 120_000);

  const draw = () => {
    const total = 1 + 0.8 * random.uniform();
    const share = 0.05 + 0.9 * random.uniform();
    return { lower: total * (1 - share), higher: total * share, share };
  };
  const filling = (pair: Pair) => PATH[pair] * (1 + 0.004 * random.normal());

  test('sound spectra: cautions at most 3 %, withheld at most 0.5 %, errors small and inside their intervals', () => {
    let count = 0;
    let cautions = 0;
    let withheld = 0;
    let inside = 0;
    const squares: number[] = [];
    for (const calibration of calibrations)
      for (const pair of PAIRS)
        for (let run = 0; run < 60; run++) {
          const { lower, higher, share } = draw();
          const absorbance = absorbanceOf(pair, lower, higher, filling(pair), random);
          const result = assayInvented(inventedSample(pair, absorbance), calibration);
          const found = shareOf(result, pair);
          count += 1;
          cautions += Number(result.state === 'caution');
          withheld += Number(result.state === 'withheld');
          inside += Number(Math.abs(found.share - share) <= 1.96 * found.uncertainty);
          squares.push((found.share - share) ** 2);
        }
    const rms = 100 * Math.sqrt(squares.reduce((a, b) => a + b, 0) / count);
    expect(cautions / count).toBeLessThanOrEqual(0.03);
    expect(withheld / count).toBeLessThanOrEqual(0.005);
    expect(rms).toBeLessThan(0.15);
    expect(inside / count).toBeGreaterThan(0.92);
  });

  test.each(Object.keys(FAULTS))(
    '%s is flagged at least 95 % of the time when it moves the state of charge by more than U',
    (name) => {
      let moved = 0;
      let missed = 0;
      for (const calibration of calibrations)
        for (const pair of PAIRS)
          for (let run = 0; run < RUNS; run++) {
            const { lower, higher, share } = draw();
            const fault = FAULTS[name]!();
            const clean = shareOf(
              assayInvented(
                inventedSample(pair, absorbanceOf(pair, lower, higher, filling(pair), random)),
                calibration,
              ),
              pair,
            );
            const result = assayInvented(
              inventedSample(pair, absorbanceOf(pair, lower, higher, filling(pair), random, fault)),
              calibration,
            );
            const found = shareOf(result, pair);
            // A Beer-Lambert pair does not mind its path: what is left there is chance, not the fault.
            const minds = name !== 'wrong path' || pair === 'V4/V5';
            if (!minds || Math.abs(found.share - share) <= 2 * clean.uncertainty) continue;
            moved += 1;
            missed += Number(result.state === 'sound');
          }
      expect(moved).toBeGreaterThan(20);
      expect(missed / moved).toBeLessThanOrEqual(0.05);
    },
  );

  test('IV/V undiluted and diluted twenty-fold agree within U', () => {
    const calibration = calibrations[0]!;
    const dense = assayInvented(inventedSample('V4/V5', absorbanceOf('V4/V5', 0.7, 0.9, 0.02, random)), calibration);
    const thin = assayInvented(
      inventedSample('V4/V5', absorbanceOf('V4/V5', 0.7 / 20, 0.9 / 20, 1, random), {
        pathLength: 1,
        pathUncertainty: 0.001,
        dilution: 20,
        dilutionUncertainty: 0.002,
      }),
      calibration,
    );
    const one = dense.stateOfCharge;
    const two = thin.stateOfCharge;
    const apart = Math.abs(one.value! - two.value!);
    expect(apart).toBeLessThan(2 * Math.hypot(one.uncertainty!, two.uncertainty!));
    expect(apart).toBeLessThan(0.02);
  });
});
