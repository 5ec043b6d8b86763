import * as v from 'valibot';
import type { AssayDocument } from '../assay/result.ts';
import { PAIRS, SIDES, SPECIES } from '../electrolyte/species.ts';
import { finding, finiteNumber, notNegative, readStrictJson } from './strictJson.ts';

const quantity = v.object({ value: v.nullable(finiteNumber), uncertainty: v.nullable(notNegative) });
const numbers = {
  concentration: v.record(v.picklist(SPECIES), quantity),
  totalVanadium: quantity,
  averageOxidationState: quantity,
  stateOfCharge: v.object({ ...quantity.entries, interval: v.nullable(v.tuple([finiteNumber, finiteNumber])) }),
};

const assay = v.looseObject({
  sample: v.string(),
  system: v.string(),
  side: v.picklist(SIDES),
  pair: v.picklist(PAIRS),
  state: v.picklist(['sound', 'caution', 'withheld']),
  ...numbers,
  correlation: v.nullable(finiteNumber),
  errorSources: v.array(v.object({ source: v.string(), key: v.string(), effect: v.record(v.string(), finiteNumber) })),
  budget: v.array(
    v.object({
      source: v.string(),
      stateOfCharge: finiteNumber,
      totalVanadium: finiteNumber,
      averageOxidationState: finiteNumber,
    }),
  ),
  fit: v.nullable(v.looseObject({ residualRms: finiteNumber })),
  findings: v.array(finding),
  assumed: v.array(v.string()),
  pathLength: finiteNumber,
  dilution: finiteNumber,
  input: v.object({ file: v.string(), column: v.string(), sha256: v.string() }),
  unreported: v.optional(v.object(numbers)),
});

const assayDocument = v.looseObject({
  schema: v.literal('tankhue/assay/1'),
  calibration: v.object({ name: v.string(), sha256: v.string() }),
  assays: v.array(assay),
});

/** The result JSON of assays, every field that is printed or drawn checked. @throws TankhueErrors `json-broken`, `field-wrong` */
export const readAssayDocument = (text: string, file: string): AssayDocument =>
  readStrictJson(assayDocument, text, file, 'assays (tankhue assay --format json, or its report)') as AssayDocument;
