import * as v from 'valibot';
import { PAIRS, SPECIES } from '../electrolyte/species.ts';

// The file `tankhue/calibration/1`, strictly. Wavelengths nm, absorption coefficients L/(mol·cm), concentrations mol/L, path cm, temperature K.

const finite = v.pipe(v.number(), v.finite());
const positive = v.pipe(finite, v.minValue(Number.MIN_VALUE));
const nonNegative = v.pipe(finite, v.minValue(0));
const text = v.string();
const row = v.array(finite);
const pair = v.picklist(PAIRS);
const range = v.tuple([finite, finite]);
const bySpecies = v.partial(v.strictObject({ V2: nonNegative, V3: nonNegative, V4: nonNegative, V5: nonNegative }));

const association = v.strictObject({
  name: text,
  reactants: v.partial(v.strictObject({ V2: positive, V3: positive, V4: positive, V5: positive })),
  associationConstant: nonNegative,
});

const errorFigures = v.strictObject({ bias: finite, rmse: nonNegative, largest: nonNegative, coverage: nonNegative });

const leftOut = v.strictObject({
  name: text,
  group: text,
  share: finite,
  shareError: finite,
  shareUncertainty: nonNegative,
  total: nonNegative,
  totalError: finite,
  totalUncertainty: nonNegative,
  reducedChiSquare: nonNegative,
  misfit: nonNegative,
  faultScores: v.record(text, finite),
});

const pairCalibration = v.strictObject({
  pair,
  model: v.strictObject({
    pair,
    wavelength: row,
    associations: v.array(association),
    spectra: v.array(row),
    noise: positive,
    modes: v.array(row),
    designInverse: row,
  }),
  constants: v.array(
    v.strictObject({
      association: text,
      value: nonNegative,
      interval: v.tuple([v.nullable(finite), v.nullable(finite)]),
    }),
  ),
  labelsMoved: v.boolean(),
  labelUncertainty: v.strictObject({ share: nonNegative, total: nonNegative }),
  betweenGroup: v.strictObject({ share: nonNegative, total: nonNegative, freedom: positive }),
  match: v.strictObject({ mean: finite, deviation: nonNegative, count: nonNegative }),
  faultScales: v.record(text, positive),
  domain: v.strictObject({ share: range, total: range, path: range, absorbance: finite }),
  leftOut: v.array(leftOut),
  validation: v.array(v.strictObject({ group: text, count: nonNegative, share: errorFigures, total: errorFigures })),
  evidence: v.array(
    v.strictObject({
      model: text,
      labelsMoved: v.boolean(),
      noise: positive,
      modeCount: nonNegative,
      rmse: nonNegative,
      surprise: finite,
    }),
  ),
  limits: v.array(
    v.strictObject({
      species: v.picklist(SPECIES),
      path: positive,
      decision: nonNegative,
      detection: nonNegative,
      quantification: nonNegative,
      sensitivity: nonNegative,
      selectivity: nonNegative,
    }),
  ),
  design: v.strictObject({ condition: v.nullable(positive), weak: text }),
});

const standard = v.strictObject({
  name: text,
  pair,
  role: v.picklist(['calibration', 'check', 'left-out']),
  group: text,
  file: text,
  column: text,
  sha256: text,
  path: positive,
  dilution: v.pipe(finite, v.minValue(1)),
  concentration: bySpecies,
  pathMoved: finite,
  pathMovedInUncertainty: finite,
  shareDoubt: finite,
  shareDoubtInUncertainty: finite,
  leverage: finite,
  residualRms: nonNegative,
  influence: finite,
  doubt: v.nullable(text),
});

export const calibrationSchema = v.strictObject({
  schema: v.literal('tankhue/calibration/1'),
  name: text,
  source: text,
  grid: v.strictObject({ from: positive, to: positive, step: positive }),
  matrix: v.strictObject({ temperature: v.nullable(positive), acid: v.nullable(positive) }),
  pairs: v.pipe(v.array(pairCalibration), v.minLength(1)),
  standards: v.array(standard),
  findings: v.array(
    v.strictObject({ code: text, severity: v.picklist(['note', 'caution', 'withhold']), message: text, hint: text }),
  ),
  provenance: v.strictObject({ tool: text, command: text, sheetSha256: text }),
});

export type CalibrationFile = v.InferOutput<typeof calibrationSchema>;
