// What        Error of the absorbance scale from potassium dichromate solutions.
// Equation    perchloric acid: A_nominal(c) interpolated in the published table, error = (A − A_blank)/ℓ − A_nominal(c);
//             sulfuric acid: A(1 %, 1 cm) = (A − A_blank)/(ℓ c), c in g/100 mL, held against the pharmacopoeia's limits.
// Why so      two published lists that do not lean on each other; in perchloric acid the table is interpolated, not scaled, because
//             hydrogenchromate dimerises.
// Valid for   20-100 mg/L (perchloric), 57-63 mg/L and, at 430 nm, 570-630 mg/L (sulfuric). Nothing is extrapolated.
// Units       absorbance; c mg/L; ℓ cm. Scale: measured over true, minus 1.
// Source      see `photometricStandards.ts`; permitted error ±0.010 or 1 %, European Pharmacopoeia 2.2.25, from memory.
import type { InstrumentTest, MeasuredProperty } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { weightedMean } from '../../numerics/meanAndDeviation.ts';
import { absorbanceAt } from './absorbanceAt.ts';
import {
  DICHROMATE_430_NM,
  DICHROMATE_430_RANGE,
  DICHROMATE_IN_PERCHLORIC_ACID,
  DICHROMATE_IN_SULFURIC_ACID,
  perchloricUncertainty,
  SULFURIC_ACID_RANGE,
} from './photometricStandards.ts';
import type { DichromateScan } from './scans.ts';
import { judged, type TestOutcome } from './testOutcome.ts';

/** Absorbance a scan without a blank may be off by, k = 1 [common practice]. */
const UNKNOWN_BLANK = 0.005;

interface Reading {
  readonly test: InstrumentTest;
  /** measured over true − 1, with what is independent between readings and what they share through solution and cell */
  readonly relativeError: number;
  readonly own: number;
  readonly shared: number;
}

export function photometricScale(scans: readonly DichromateScan[]): TestOutcome<MeasuredProperty | null> {
  const readings = scans.flatMap((scan) =>
    scan.test === 'dichromate-perchloric' ? perchloricReadings(scan) : sulfuricReadings(scan),
  );
  return {
    property: readings.length > 0 ? meanScale(readings) : null,
    tests: readings.map(({ test }) => test),
    findings: scans.flatMap(doubtsAboutScan),
  };
}

function netAbsorbance(scan: DichromateScan, nm: number): MeasuredProperty | null {
  const gross = absorbanceAt(scan.spectrum, nm);
  if (!gross || !scan.blank)
    return gross && { value: gross.value, uncertainty: Math.hypot(gross.uncertainty, UNKNOWN_BLANK) };
  const blank = absorbanceAt(scan.blank, nm);
  return blank && { value: gross.value - blank.value, uncertainty: Math.hypot(gross.uncertainty, blank.uncertainty) };
}

const relative = ({ value, uncertainty }: MeasuredProperty): number => uncertainty / value;

function perchloricReadings(scan: DichromateScan): Reading[] {
  const { concentration, absorbance } = DICHROMATE_IN_PERCHLORIC_ACID;
  const c = scan.concentration.value;
  if (c < concentration[0] || c > concentration[concentration.length - 1]!) return [];
  return absorbance.flatMap(({ nm, values }) => {
    const net = netAbsorbance(scan, nm);
    if (!net) return [];
    const nominal = interpolate(concentration, values, c);
    const perCentimetre = net.value / scan.pathLength.value;
    const shared = Math.hypot(relative(scan.concentration), relative(scan.pathLength));
    // The table prints three decimals.
    const own = Math.hypot(
      net.uncertainty / net.value,
      perchloricUncertainty(nominal) / 1.96,
      0.0005 / Math.sqrt(3) / nominal,
    );
    const permitted = Math.max(0.01, 0.01 * nominal);
    const test = judged(
      {
        test: scan.test,
        property: `error at ${nm} nm, ${c} mg/L`,
        unit: 'A at 1 cm',
        value: perCentimetre - nominal,
        uncertainty: nominal * Math.hypot(own, shared),
        limitSource: 'European Pharmacopoeia 2.2.25: ±0.010 or 1 %, from memory; Burke and Mavrodineanu 1976 (nominal)',
      },
      [-permitted, permitted],
    );
    return [{ test, relativeError: perCentimetre / nominal - 1, own, shared }];
  });
}

function sulfuricReadings(scan: DichromateScan): Reading[] {
  const c = scan.concentration.value;
  const limits = [
    ...(within(c, SULFURIC_ACID_RANGE) ? DICHROMATE_IN_SULFURIC_ACID : []),
    ...(within(c, DICHROMATE_430_RANGE) ? [DICHROMATE_430_NM] : []),
  ];
  return limits.flatMap(({ nm, low, high }) => {
    const net = netAbsorbance(scan, nm);
    if (!net) return [];
    // 1 g/100 mL is 10,000 mg/L.
    const specific = net.value / (scan.pathLength.value * (c / 10000));
    const shared = Math.hypot(relative(scan.concentration), relative(scan.pathLength));
    const own = net.uncertainty / net.value;
    const middle = (low + high) / 2;
    const test = judged(
      {
        test: scan.test,
        property: `A(1 %, 1 cm) at ${nm} nm`,
        unit: '1',
        value: specific,
        uncertainty: specific * Math.hypot(own, shared),
        limitSource: `pharmacopoeia 2.2.25, editions around 2000${nm === 430 ? ', from memory' : ''}`,
      },
      [low, high],
    );
    // The limits are a permitted range, not the truth: half their width is taken as the 95 % uncertainty of the middle.
    return [
      { test, relativeError: specific / middle - 1, own: Math.hypot(own, (high - low) / 2 / middle / 1.96), shared },
    ];
  });
}

function meanScale(readings: readonly Reading[]): MeasuredProperty {
  const { value, uncertainty } = weightedMean(
    readings.map(({ relativeError }) => relativeError),
    readings.map(({ own }) => own),
  );
  return { value, uncertainty: Math.hypot(uncertainty, Math.max(...readings.map(({ shared }) => shared))) };
}

function doubtsAboutScan(scan: DichromateScan): Finding[] {
  const findings: Finding[] = [];
  const c = scan.concentration.value;
  const ranges =
    scan.test === 'dichromate-perchloric' ? [[20, 100] as const] : [SULFURIC_ACID_RANGE, DICHROMATE_430_RANGE];
  if (!ranges.some((range) => within(c, range)))
    findings.push({
      code: 'standard-out-of-range',
      severity: 'caution',
      message: `expected ${ranges.map(([low, high]) => `${low} to ${high}`).join(' or ')} mg/L dichromate for the published values; received ${c} mg/L: the scan was not judged`,
      hint: 'make the solution within that range; the published values are not extrapolated',
    });
  else if (!(scan.spectrum.wavelength[0]! <= 350))
    findings.push({
      code: 'standard-not-covered',
      severity: 'note',
      message: `expected a scan down to 350 nm or less for dichromate; received one from ${scan.spectrum.wavelength[0]} nm`,
      hint: 'scan from 230 nm, or as far as the photometer goes; 350 nm is the first published value near the range of an assay',
    });
  if (!scan.blank)
    findings.push({
      code: 'no-blank',
      severity: 'caution',
      message: `expected a blank of the same acid for ${scan.spectrum.name}; received none: ${UNKNOWN_BLANK} A (k = 1) was added to the uncertainty`,
      hint: 'scan the acid in the same cell and write its file in the column blank_file',
    });
  return findings;
}

const within = (value: number, [low, high]: readonly [number, number]): boolean => value >= low && value <= high;

/** Straight lines between the points of a rising table; the caller has checked the range. */
function interpolate(x: readonly number[], y: readonly number[], at: number): number {
  const above = Math.max(
    1,
    x.findIndex((value) => value >= at),
  );
  const share = (at - x[above - 1]!) / (x[above]! - x[above - 1]!);
  return y[above - 1]! + share * (y[above]! - y[above - 1]!);
}
