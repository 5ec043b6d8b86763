import * as v from 'valibot';
import type { InstrumentRecord } from '../assay/instrumentRecord.ts';
import { finding, finiteNumber, measured, notNegative, readStrictJson } from '../json/strictJson.ts';

const verdict = v.picklist(['passed', 'undecided', 'failed']);
const positive = v.pipe(finiteNumber, v.gtValue(0, 'expected more than 0'));
const share = v.pipe(notNegative, v.maxValue(1, 'expected a share of 1 or less'));

const instrumentRecord = v.looseObject({
  schema: v.literal('tankhue/instrument/1'),
  instrument: v.string(),
  checkedAt: v.string(),
  state: verdict,
  wavelengthShift: v.nullable(measured),
  offsetPrior: v.nullable(notNegative),
  slopePrior: v.nullable(notNegative),
  strayLight: v.nullable(v.object({ value: share, uncertainty: notNegative, nm: finiteNumber })),
  photometricScale: v.nullable(measured),
  noise: v.nullable(v.object({ constant: notNegative, shot: v.nullable(notNegative), step: positive })),
  cells: v.array(
    v.object({
      name: v.string(),
      pathLength: positive,
      uncertainty: notNegative,
      method: v.string(),
    }),
  ),
  tests: v.array(
    v.object({
      test: v.string(),
      property: v.string(),
      unit: v.string(),
      value: finiteNumber,
      uncertainty: notNegative,
      limits: v.tuple([v.nullable(finiteNumber), v.nullable(finiteNumber)]),
      limitSource: v.string(),
      conformity: verdict,
      probability: share,
    }),
  ),
  consequences: v.array(
    v.object({
      sample: v.string(),
      lines: v.array(v.object({ source: v.string(), stateOfCharge: finiteNumber, totalVanadium: finiteNumber })),
    }),
  ),
  findings: v.array(finding),
  assumed: v.array(v.string()),
  inputs: v.array(v.object({ file: v.string(), column: v.string(), sha256: v.string() })),
});

/** @throws TankhueErrors `json-broken`, `field-wrong` */
export const readInstrumentRecord = (text: string, file: string): InstrumentRecord =>
  readStrictJson(instrumentRecord, text, file, 'an instrument record (tankhue verify --out)');
