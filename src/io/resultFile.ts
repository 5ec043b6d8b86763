import * as v from 'valibot';
import type { AssayDocument } from '../assay/result.ts';
import { PAIRS, SIDES, SPECIES } from '../electrolyte/species.ts';
import { finding, finiteNumber, notNegative, readStrictJson } from '../json/strictJson.ts';
import type { BalanceDocument } from '../tanks/balance.ts';
import { VERDICTS } from '../tanks/verdict.ts';

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

const inUnit = v.object({ ...quantity.entries, unit: v.string() });
const bySide = <Schema extends v.GenericSchema>(schema: Schema) => v.object({ negative: schema, positive: schema });
const plantFigures = v.looseObject({
  netOxidation: finiteNumber,
  vanadiumShift: finiteNumber,
  chargeOffset: finiteNumber,
  usableCharge: finiteNumber,
  vanadium: bySide(finiteNumber),
  stateOfCharge: bySide(finiteNumber),
  volume: bySide(finiteNumber),
});
const remedy = v.looseObject({
  kind: v.string(),
  summary: v.string(),
  how: v.string(),
  needs: v.string(),
  quantity: v.nullable(v.object({ value: finiteNumber, uncertainty: notNegative, unit: v.string() })),
  amounts: v.array(v.object({ what: v.string(), value: finiteNumber, unit: v.string() })),
  before: plantFigures,
  after: plantFigures,
  warming: finiteNumber,
  gain: finiteNumber,
  recovered: finiteNumber,
  rounds: v.array(v.object({ dose: finiteNumber, left: finiteNumber })),
  forbidden: v.array(v.string()),
  cautions: v.array(v.object({ code: v.string(), text: v.string() })),
});
const standing = v.picklist(['clear', 'possible', 'within']);
const judged = v.object({ watch: standing, act: standing });
const limit = v.object({ watch: finiteNumber, act: finiteNumber });

const driftOf = v.object({
  rate: v.object({ value: finiteNumber, uncertainty: notNegative }),
  actAt: v.nullable(finiteNumber),
  notBefore: v.nullable(finiteNumber),
});
const drift = v.object({
  visits: finiteNumber,
  from: finiteNumber,
  to: finiteNumber,
  netOxidation: driftOf,
  vanadiumShift: driftOf,
});

const balanceDocument = v.looseObject({
  schema: v.literal('tankhue/balance/1'),
  calibration: v.object({ name: v.string(), sha256: v.string() }),
  systems: v.array(
    v.looseObject({
      system: v.string(),
      verdict: v.picklist(VERDICTS),
      sentence: v.string(),
      netOxidation: inUnit,
      vanadiumShift: inUnit,
      chargeOffset: inUnit,
      usableCharge: inUnit,
      fullCharge: inUnit,
      averageOxidationState: inUnit,
      stateOfCharge: bySide(inUnit),
      windows: v.nullable(bySide(v.tuple([finiteNumber, finiteNumber]))),
      openCircuit: v.nullable(v.object({ measured: inUnit, predicted: inUnit })),
      judged: v.nullable(v.object({ netOxidation: judged, vanadiumShift: judged, chargeOffset: judged })),
      limits: v.looseObject({ oxidation: limit, shift: limit, source: v.string() }),
      firstRemedy: v.string(),
      remedies: v.array(remedy),
      negative: v.nullable(assay),
      positive: v.nullable(assay),
      composite: v.nullable(assay),
      findings: v.array(finding),
      drift: v.optional(drift),
      assumed: v.array(v.string()),
      disclaimer: v.string(),
    }),
  ),
});

/** The result JSON of plants, every field that is printed or drawn checked. @throws TankhueErrors `json-broken`, `field-wrong` */
export const readBalanceDocument = (text: string, file: string): BalanceDocument =>
  readStrictJson(
    balanceDocument,
    text,
    file,
    'balances (tankhue balance --format json, or its report)',
  ) as BalanceDocument;
