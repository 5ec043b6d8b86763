import type { Calibration, PairCalibration } from '../../src/calibration/calibration.ts';
import type { LeftOut } from '../../src/calibration/validate.ts';

// A calibration of no standards: smooth bands and errors that follow a sine, so that its pictures can be tested apart from the engine.

const AXIS = Float64Array.from({ length: 53 }, (_, i) => 430 + 10 * i);
const bands = (...list: readonly (readonly [height: number, centre: number, width: number])[]): Float64Array =>
  AXIS.map((nm) =>
    list.reduce((sum, [height, centre, width]) => sum + height * Math.exp(-(((nm - centre) / width) ** 2)), 0),
  );

const leftOut: LeftOut[] = ['1.0 mol/L', '1.8 mol/L'].flatMap((group, g) =>
  [0, 0.25, 0.5, 0.75, 1].map((share, i) => ({
    name: `${group} ${100 * share} %`,
    group,
    share,
    shareError: g === 1 && i === 2 ? 0.03 : 0.006 * Math.sin(2 * i + g),
    shareUncertainty: 0.004 + 0.002 * i,
    total: g === 0 ? 1 : 1.8,
    totalError: 0.01 * Math.cos(i),
    totalUncertainty: 0.012,
    reducedChiSquare: 1,
    misfit: 0.002,
    faultScores: {},
  })),
);

const pair: PairCalibration = {
  pair: 'V4/V5',
  model: {
    pair: 'V4/V5',
    wavelength: AXIS,
    associations: [{ name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 0.9 }],
    spectra: [bands([19, 764, 75], [3, 640, 60]), bands([14, 400, 38]), bands([180, 600, 170], [140, 900, 160])],
    noise: 0.0008,
    modes: [AXIS.map((nm) => 0.001 * Math.exp(-(((nm - 450) / 60) ** 2)))],
    designInverse: Float64Array.of(900, 0, 0, 0, 30000, 0, 0, 0, 90000),
  },
  constants: [{ association: 'V4·V5', value: 0.9, interval: [0.5, null] }],
  labelsMoved: false,
  labelUncertainty: { share: 0, total: 0 },
  betweenGroup: { share: 0.006, total: 0.02, freedom: 9 },
  match: { mean: 0, deviation: 1, count: 10 },
  faultScales: {},
  domain: { share: [0, 1], total: [1, 1.8], path: [0.02, 0.02], absorbance: 1.2 },
  leftOut,
  validation: [
    {
      group: 'all',
      count: 10,
      share: { bias: 0.003, rmse: 0.0106, largest: 0.03, coverage: 0.9 },
      total: { bias: 0.002, rmse: 0.008, largest: 0.01, coverage: 1 },
    },
  ],
  evidence: [],
  limits: [
    {
      species: 'V4',
      path: 0.02,
      decision: 0.009,
      detection: 0.018,
      quantification: 0.033,
      sensitivity: 9,
      selectivity: 0.9,
    },
    {
      species: 'V5',
      path: 0.02,
      decision: 0.016,
      detection: 0.032,
      quantification: 0.06,
      sensitivity: 2,
      selectivity: 0.7,
    },
  ],
  design: { condition: 4, weak: 'no weak direction' },
};

export const inventedCalibration: Calibration = {
  name: 'invented',
  source: '',
  grid: { from: 430, to: 950, step: 10 },
  matrix: { temperature: 298.15, acid: 4.5 },
  pairs: [pair],
  standards: leftOut.map(({ name, group, share, total, shareError }, i) => ({
    name,
    pair: 'V4/V5',
    role: 'calibration',
    group,
    file: 'standards.csv',
    column: name,
    sha256: 'ef'.repeat(32),
    path: 0.02,
    dilution: 1,
    concentration: { V4: total * (1 - share), V5: total * share },
    pathMoved: 0.01 * Math.sin(i),
    pathMovedInUncertainty: Math.sin(i),
    shareDoubt: -shareError,
    shareDoubtInUncertainty: -shareError / 0.008,
    leverage: 0.1,
    residualRms: 0.002,
    influence: 0.0004,
    doubt: Math.abs(shareError) > 0.02 ? 'mixed wrong' : null,
  })),
  findings: [],
  provenance: { tool: 'tankhue test', command: 'tankhue calibrate invented.csv', sheetSha256: '12'.repeat(32) },
};
