import { existsSync, readFileSync } from 'node:fs';
import { beforeAll, describe, expect, test } from 'vitest';
import { assaySample, DEFAULT_ASSAY_OPTIONS } from '../../src/assay/assaySample.ts';
import { calibrate } from '../../src/calibration/build.ts';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { parseCalibration } from '../../src/calibration/file.ts';
import type { Standard } from '../../src/calibration/standard.ts';
import { PAIRS, speciesOfPair, type Species } from '../../src/electrolyte/species.ts';
import { simulateSpectrum } from '../../src/estimation/simulate.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { balancePlant, type SystemBalance } from '../../src/tanks/balance.ts';
import { plantFromAssays } from '../../src/tanks/fromAssays.ts';
import { imbalanceOf } from '../../src/tanks/imbalance.ts';
import type { TankReading } from '../../src/tanks/reading.ts';

// Invented plants with known truth (scenarios.json beside the project; skipped where it is not), spectra simulated with noise of 0.5 mA,
// 0.4 % of path from filling to filling, volumes to 0.5 %, assayed with a calibration from invented imperfect standards.

const FILE = new URL('../../../shared/scenarios.json', import.meta.url);
const present = existsSync(FILE);

interface Plant {
  readonly name: string;
  readonly negative: { readonly volume_L: number; readonly concentration: Partial<Record<Species, number>> };
  readonly positive: { readonly volume_L: number; readonly concentration: Partial<Record<Species, number>> };
  readonly cells_in_series: number;
  readonly verdict: string;
  readonly firstRemedy: string;
  readonly truth: Readonly<Record<string, number>>;
  readonly standardUncertainty: Readonly<Record<string, number>>;
  readonly spoil?: { readonly kind: string };
}

const plants: Plant[] = present ? (JSON.parse(readFileSync(FILE, 'utf8')) as { plants: Plant[] }).plants : [];
const reference = parseCalibration(readFileSync('calibration/reference.json', 'utf8'));
const PATHS = { 'V2/V3': 0.1, 'V3/V4': 0.05, 'V4/V5': 0.02 } as const;
const AXIS = Float64Array.from({ length: 521 }, (_, i) => 430 + i);
const FILLING = 0.004;

function ownCalibration(seed: number): Calibration {
  const random = seededRandom(seed);
  const standards = PAIRS.flatMap((pair) =>
    [1.2, 1.4, 1.6, 1.8, 1.95].flatMap((total) =>
      [0.02, 0.18, 0.34, 0.5, 0.66, 0.82, 0.98].map((share): Standard => {
        const [low, high] = speciesOfPair(pair);
        const label = { [low]: total * (1 - share), [high]: total * share };
        const name = `${pair} ${total} ${share}`;
        const spectrum = simulateSpectrum(
          reference,
          {
            name,
            pair,
            concentration: {
              [low]: label[low]! * (1 + 0.003 * random.normal()),
              [high]: label[high]! * (1 + 0.003 * random.normal()),
            },
            pathLength: PATHS[pair],
            wavelength: AXIS,
            noise: { constant: 0.0005, filling: FILLING },
          },
          random,
        );
        return {
          name,
          spectrum: { ...spectrum, origin: { file: pair, column: name, sha256: '' } },
          pathLength: PATHS[pair],
          pathUncertainty: FILLING * PATHS[pair],
          dilution: 1,
          temperature: null,
          concentration: { V2: 0, V3: 0, V4: 0, V5: 0, ...label },
          concentrationUncertainty: 0.002 * total,
          preparation: `${pair} ${total}`,
          role: 'calibration',
        };
      }),
    ),
  );
  return calibrate({
    name: 'own',
    source: 'invented',
    standards,
    provenance: { tool: '', command: '', sheetSha256: '' },
  });
}

function balanced(plant: Plant, calibration: Calibration, seed: number): SystemBalance {
  const random = seededRandom(seed);
  const kind = plant.spoil?.kind ?? '';
  const cuvettes = (['negative', 'positive'] as const).map((side) => {
    const exchanged = kind === 'labels exchanged';
    const from = exchanged === (side === 'negative') ? 'positive' : 'negative';
    const pathLength = from === 'negative' ? 0.1 : 0.02;
    const bubble = side === 'negative' ? { bubble: 0.15 } : { offset: 0.06, scatter: 0.02 };
    const poor = kind === 'poor record';
    const spectrum = simulateSpectrum(
      reference,
      {
        name: side,
        concentration: plant[from].concentration,
        pathLength,
        wavelength: AXIS,
        faults: kind === 'bubble and film' ? bubble : {},
        noise: { constant: poor ? 0.02 : 0.0005, filling: FILLING },
      },
      random,
    );
    const assay = assaySample(
      {
        name: side,
        system: plant.name,
        side,
        spectrum,
        blank: 'given',
        pathLength: poor ? null : pathLength,
        pathUncertainty: poor ? null : FILLING * pathLength,
        dilution: poor ? null : 1,
        dilutionUncertainty: null,
        temperature: null,
        acid: null,
        takenAt: null,
        scannedAt: null,
        inertGas: null,
        cell: null,
        flask: null,
      },
      { calibration, sha256: 'own', isReference: false },
      { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
    );
    const volume = plant[side].volume_L;
    return {
      assay,
      details: {
        tank: null,
        volume: volume * (1 + 0.005 * random.normal()),
        volumeUncertainty: 0.005 * volume,
        cellsInSeries: plant.cells_in_series,
        targetOxidationState: null,
        openCircuit: null,
        formalPotential: null,
        fillVanadium: null,
        compositeShares: null,
        watchOxidation: null,
        actOxidation: null,
        takenAt: null,
      },
    };
  });
  return balancePlant(plantFromAssays(plant.name, cuvettes));
}

describe.skipIf(!present)('invented plants from spectra', () => {
  let calibration: Calibration;
  beforeAll(() => {
    calibration = ownCalibration(1);
  }, 60_000);

  test.each(plants.map((plant) => [plant.name, plant] as const))(
    '%s gets its verdict and first remedy in at least 95 of 100 seeds',
    (_, plant) => {
      let right = 0;
      for (let seed = 1; seed <= 100; seed++) {
        const { verdict, firstRemedy } = balanced(plant, calibration, 5000 + seed);
        right += Number(verdict === plant.verdict && firstRemedy === plant.firstRemedy);
      }
      expect(right).toBeGreaterThanOrEqual(95);
    },
  );
});

/** u(S) 1 point and u(c) 1 %, independent, as the printed uncertainties of the plants assume. */
function tank(
  side: 'negative' | 'positive',
  plant: Plant,
  uState: number,
  uConcentration: number,
  uVolume: number,
): TankReading {
  const { concentration, volume_L: volume } = plant[side];
  const [low, high] = Object.keys(concentration) as [Species, Species];
  const total = concentration[low]! + concentration[high]!;
  return {
    name: side,
    side,
    concentration,
    errorSources: [
      { source: 'state of charge', key: `S ${side}`, effect: { [low]: -uState * total, [high]: uState * total } },
      {
        source: 'total',
        key: `c ${side}`,
        effect: { [low]: uConcentration * concentration[low]!, [high]: uConcentration * concentration[high]! },
      },
    ],
    volume,
    volumeUncertainty: uVolume * volume,
    assay: null,
  };
}

describe.skipIf(!present)('invented plants from concentrations alone', () => {
  // Printed to five significant figures in scenarios.json; exact arithmetic on stated concentrations.
  test.each(plants.filter((plant) => plant.name !== 'fenn-bridge').map((plant) => [plant.name, plant] as const))(
    '%s: X, M, offset, usable charge and their uncertainties to the printed digits',
    (_, plant) => {
      const imbalance = imbalanceOf(
        [tank('negative', plant, 0.01, 0.01, 0.005), tank('positive', plant, 0.01, 0.01, 0.005)],
        null,
      );
      expect(imbalance.netOxidation.value).toBeCloseTo(plant.truth['netOxidation_mol']!, 1);
      expect(imbalance.vanadiumShift.value).toBeCloseTo(plant.truth['vanadiumShift_mol']!, 1);
      expect(imbalance.chargeOffset.value).toBeCloseTo(plant.truth['chargeOffset_mol']!, 1);
      expect(imbalance.usableCharge.value).toBeCloseTo(plant.truth['usableCharge_mol']!, 1);
      expect(imbalance.netOxidation.uncertainty).toBeCloseTo(plant.standardUncertainty['netOxidation_mol']!, 1);
      expect(imbalance.vanadiumShift.uncertainty).toBeCloseTo(plant.standardUncertainty['vanadiumShift_mol']!, 1);
      expect(imbalance.chargeOffset.uncertainty).toBeCloseTo(plant.standardUncertainty['chargeOffset_mol']!, 1);
      expect(imbalance.averageOxidationState.uncertainty).toBeCloseTo(
        plant.standardUncertainty['averageOxidationState']!,
        4,
      );
    },
  );
});
