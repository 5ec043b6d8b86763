import * as v from 'valibot';
import type { ComparedAssay } from '../bench/titration/agreement.ts';
import { PAIRS } from '../electrolyte/species.ts';
import { finiteNumber, notNegative, readStrictJson } from '../json/strictJson.ts';

const quantity = v.object({ value: v.nullable(finiteNumber), uncertainty: v.nullable(notNegative) });

const assayDocument = v.looseObject({
  schema: v.literal('tankhue/assay/1'),
  assays: v.array(
    v.looseObject({
      sample: v.string(),
      system: v.string(),
      pair: v.picklist(PAIRS),
      totalVanadium: quantity,
      averageOxidationState: quantity,
      stateOfCharge: v.looseObject({
        ...quantity.entries,
        interval: v.nullable(v.tuple([finiteNumber, finiteNumber])),
      }),
    }),
  ),
});

/** The numbers of assays that something else is compared with. @throws TankhueErrors `json-broken`, `field-wrong` */
export const readAssayNumbers = (text: string, file: string): ComparedAssay[] =>
  readStrictJson(assayDocument, text, file, 'assays (tankhue assay --format json)').assays;
