import type { InstrumentConsequence, InstrumentRecord, InstrumentTest } from '../assay/instrumentRecord.ts';
import { millimetresFromCentimetres } from '../units.ts';
import { findingText } from './assayText.ts';
import { decimalsFor, quantityText, wrapped } from './quantityText.ts';

const WIDTH = 80;
const VERDICT = {
  passed: 'every test keeps its limits, past their guard bands',
  undecided: 'no test fails, but not every one is past its guard band: measure those again',
  failed: 'a test is past its limit: mend the photometer before the next assay',
} as const;

/** A performance check for a terminal: verdict, tests, what it means for an assay, what later assays take from it. */
export function instrumentText(record: InstrumentRecord): string {
  const name = [record.instrument || 'photometer', record.checkedAt].filter(Boolean).join(', ');
  const verdict = record.tests.length > 0 ? VERDICT[record.state] : 'nothing could be judged';
  return [
    wrapped(`${name} — ${record.state.toUpperCase()}: ${verdict}`, WIDTH, '  '),
    ...record.findings.filter(({ severity }) => severity !== 'note').map(findingText),
    '',
    ...record.tests.map(testLines),
    '',
    ...consequenceLines(record.consequences),
    'later assays take from this',
    ...taken(record).map((line) => `  ${line}`),
    ...record.findings.filter(({ severity }) => severity === 'note').map(findingText),
    `assumed: ${wrapped(record.assumed.join('; '), WIDTH - 9, '  ')}`,
    '',
  ].join('\n');
}

function testLines(test: InstrumentTest): string {
  const [low, high] = test.limits.map((limit) => limit !== null && Number(limit.toPrecision(6)));
  const limits = low === false ? `≤ ${high}` : high === false ? `≥ ${low}` : `${low} … ${high}`;
  const unit = test.unit === '1' ? '' : ` ${test.unit}`;
  return [
    `  ${test.conformity.padEnd(10)}${test.test}, ${test.property}`,
    `            ${quantityText(test.value, test.uncertainty)}${unit}; limits ${limits}; kept with probability ${probabilityText(test.probability)}`,
  ].join('\n');
}

function probabilityText(probability: number): string {
  if (probability > 0.999) return '> 99.9 %';
  return probability < 0.001 ? '< 0.1 %' : `${(100 * probability).toFixed(1)} %`;
}

function consequenceLines(consequences: readonly InstrumentConsequence[]): string[] {
  if (consequences.length === 0) return [];
  return [
    'what it does to an assay that does not know of it (k = 1)',
    ...consequences.flatMap(({ sample, lines }) => [
      `  ${sample}`,
      ...lines.map(
        ({ source, stateOfCharge, totalVanadium }) =>
          `    ${source.padEnd(18)}${(100 * stateOfCharge).toFixed(2).padStart(6)} points of S, ${(100 * totalVanadium).toFixed(2).padStart(5)} % of total vanadium`,
      ),
    ]),
    '',
  ];
}

function taken(record: InstrumentRecord): string[] {
  const { wavelengthShift, strayLight, photometricScale, noise, offsetPrior, slopePrior, cells } = record;
  const lines: string[] = [];
  if (wavelengthShift)
    lines.push(
      `wavelength axis reads ${quantityText(wavelengthShift.value, wavelengthShift.uncertainty)} nm too long (negative: too short)`,
    );
  if (strayLight)
    lines.push(
      `stray light ${quantityText(100 * strayLight.value, 100 * strayLight.uncertainty)} % near ${strayLight.nm} nm`,
    );
  if (photometricScale)
    lines.push(
      `absorbance scale off by ${quantityText(100 * photometricScale.value, 100 * photometricScale.uncertainty)} %`,
    );
  if (noise)
    lines.push(
      `noise ${milli(noise.constant)} a point${noise.shot === null ? '' : `, and ${milli(noise.shot)} × 10^(A/2)`}`,
    );
  if (offsetPrior !== null) lines.push(`baseline offset varies by ${milli(offsetPrior)}`);
  if (slopePrior !== null) lines.push(`baseline slope varies by ${milli(slopePrior)} per 100 nm`);
  for (const { name, pathLength, uncertainty, method } of cells) {
    const u = millimetresFromCentimetres(uncertainty);
    const decimals = decimalsFor(u);
    lines.push(
      `cell ${name}: ${millimetresFromCentimetres(pathLength).toFixed(decimals)} ± ${u.toFixed(decimals)} mm (${method})`,
    );
  }
  return lines.length > 0 ? lines : ['nothing: no property was measured'];
}

const milli = (absorbance: number): string => `${(1000 * absorbance).toPrecision(2)} mA`;
