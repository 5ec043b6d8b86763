// What        Optical resolution from the fine structure of toluene in hexane.
// Equation    ratio = A(maximum near 269 nm)/A(minimum near 266 nm), pharmacopoeia: 1.5 or more.
// Why so      a slit too wide fills the valley; the ratio needs neither concentration nor path.
// Valid for   0.02 % v/v toluene in hexane, photometers that reach 264 nm.
// Units       ratio without unit.
// Source      European Pharmacopoeia 2.2.25.
import type { Finding } from '../../finding.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';
import { TOLUENE_RATIO } from './photometricStandards.ts';
import type { TolueneScan } from './scans.ts';
import { judged, type TestOutcome } from './testOutcome.ts';

/** @param noise standard deviation of one point, absorbance */
export function opticalResolution(scans: readonly TolueneScan[], noise: number): TestOutcome<null> {
  const outcomes = scans.map(({ spectrum }) => {
    const peak = valuesBetween(spectrum, 267.5, 270.5);
    const valley = valuesBetween(spectrum, 264.5, 267.5);
    if (peak.length < 3 || valley.length < 3) return { tests: [], findings: [notCovered(spectrum)] };
    const high = Math.max(...peak);
    const low = Math.min(...valley);
    const described = {
      test: 'toluene-hexane',
      property: 'A(269 nm)/A(266 nm)',
      unit: '1',
      value: high / low,
      uncertainty: (high / low) * Math.hypot(noise / high, noise / low),
      limitSource: 'pharmacopoeia: not less than 1.5 unless stated',
    };
    return { tests: [judged(described, [TOLUENE_RATIO, Infinity])], findings: [] };
  });
  return {
    property: null,
    tests: outcomes.flatMap(({ tests }) => tests),
    findings: outcomes.flatMap(({ findings }) => findings),
  };
}

const valuesBetween = ({ wavelength, absorbance }: Spectrum, from: number, to: number): number[] =>
  [...absorbance].filter((value, i) => wavelength[i]! >= from && wavelength[i]! <= to && Number.isFinite(value));

const notCovered = ({ name, wavelength }: Spectrum): Finding => ({
  code: 'standard-not-covered',
  severity: 'note',
  message: `expected a scan of toluene in hexane from 264 to 271 nm; received ${wavelength[0]} to ${wavelength[wavelength.length - 1]} nm in ${name}`,
  hint: 'leave the test out for photometers that do not reach the ultraviolet; the holmium bands show a gross loss of resolution',
});
