import * as v from 'valibot';
import type { PrecisionRecord } from '../assay/precisionRecord.ts';
import { finding, finiteNumber, notNegative, readStrictJson } from '../json/strictJson.ts';

const figure = v.object({
  standardDeviation: notNegative,
  interval: v.tuple([notNegative, notNegative]),
  degreesOfFreedom: notNegative,
});
const ofQuantity = v.object({
  unit: v.picklist(['1', 'relative']),
  components: v.array(
    v.object({
      source: v.string(),
      standardDeviation: notNegative,
      variance: finiteNumber,
      degreesOfFreedom: notNegative,
    }),
  ),
  repeatability: figure,
  reproducibility: figure,
  lines: notNegative,
  samples: notNegative,
});

const precisionRecord = v.looseObject({
  schema: v.literal('tankhue/precision/1'),
  factors: v.array(v.string()),
  quantities: v.object({
    stateOfCharge: v.exactOptional(ofQuantity),
    averageOxidationState: v.exactOptional(ofQuantity),
    totalVanadium: v.exactOptional(ofQuantity),
  }),
  findings: v.array(finding),
  assumed: v.array(v.string()),
  input: v.object({ file: v.string(), sha256: v.string() }),
});

/** @throws TankhueErrors `json-broken`, `field-wrong` */
export const readPrecisionRecord = (text: string, file: string): PrecisionRecord =>
  readStrictJson(precisionRecord, text, file, 'a precision record (tankhue precision --out)');
