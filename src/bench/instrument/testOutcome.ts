import type { InstrumentTest } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { judgeConformity } from './conformity.ts';

/** What one test contributes to the record. */
export interface TestOutcome<Property> {
  readonly property: Property;
  readonly tests: readonly InstrumentTest[];
  readonly findings: readonly Finding[];
}

/** A value with its limits, judged. Limits may be infinite; the record writes null for those. */
export function judged(
  test: Omit<InstrumentTest, 'limits' | 'conformity' | 'probability'>,
  limits: readonly [number, number],
): InstrumentTest {
  return {
    ...test,
    limits: [finiteOrNull(limits[0]), finiteOrNull(limits[1])],
    ...judgeConformity(test.value, test.uncertainty, limits),
  };
}

const finiteOrNull = (limit: number): number | null => (Number.isFinite(limit) ? limit : null);
