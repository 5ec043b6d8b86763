// What        The performance check of a photometer: every test that was scanned, judged, and what later assays need of it.
// Equation    see the file of each test.
// Why so      one record, made from whatever was scanned: what was not scanned stays null and later assays keep their usual priors.
// Valid for   scans of one instrument at one time.
// Units       those of `InstrumentRecord`.
// Source      as in the files of the tests.
import type { InstrumentRecord } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { TankhueError } from '../../errors.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';
import { celsiusFromKelvin } from '../../units.ts';
import { baselineStability, DEFAULT_BASELINE_LIMITS, type BaselineLimits } from './baselineStability.ts';
import type { MeasurementModel } from '../planning/measurementModel.ts';
import { cellPaths } from './cellPath.ts';
import { worstConformity } from './conformity.ts';
import { instrumentConsequences } from './consequence.ts';
import { opticalResolution } from './opticalResolution.ts';
import { photometricScale } from './photometricScale.ts';
import { scansOf, type InstrumentScan } from './scans.ts';
import { strayLight } from './strayLight.ts';
import { wavelengthScale } from './wavelengthScale.ts';

export interface VerificationLimits extends BaselineLimits {
  /** nm; null = those of the pharmacopoeia, 1 in the ultraviolet and 3 in the visible */
  readonly wavelength: number | null;
}

export interface VerificationOptions {
  readonly instrument: string;
  /** ISO date, or empty */
  readonly checkedAt: string;
  readonly limits: VerificationLimits;
  /** what the scans' sheet left open and was taken for granted: one sentence each */
  readonly assumed: readonly string[];
}

export const DEFAULT_VERIFICATION: VerificationOptions = {
  instrument: '',
  checkedAt: '',
  limits: { ...DEFAULT_BASELINE_LIMITS, wavelength: null },
  assumed: [],
};

/** Standard uncertainty of an axis nobody checked, nm, and noise of a point nobody measured, absorbance [common practice]. */
const UNCHECKED_AXIS = 0.3;
const UNMEASURED_NOISE = 0.001;

/**
 * @param models pairs of a calibration, to say what the faults mean for an assay; without them that part stays empty
 * @throws TankhueError `no-scans`, and what single tests refuse
 */
export function verifyInstrument(
  scans: readonly InstrumentScan[],
  options: VerificationOptions = DEFAULT_VERIFICATION,
  models: readonly MeasurementModel[] = [],
): InstrumentRecord {
  if (scans.length === 0)
    throw new TankhueError(
      'no-scans',
      'expected at least one scan; received none',
      'scans',
      'scan holmium oxide solution, repeated blanks or another of the tests',
    );
  const wavelength = wavelengthScale(scansOf(scans, 'holmium'), options.limits.wavelength);
  const baseline = baselineStability(scansOf(scans, 'blank'), scansOf(scans, 'repeat'), options.limits);
  const scale = photometricScale(scansOf(scans, 'dichromate-perchloric', 'dichromate-sulfuric'));
  const dark = strayLight(scansOf(scans, 'cut-off'));
  const resolution = opticalResolution(
    scansOf(scans, 'toluene-hexane'),
    baseline.property.noise?.constant ?? UNMEASURED_NOISE,
  );
  const cells = cellPaths(
    scansOf(scans, 'empty-cell'),
    scansOf(scans, 'filled-cell'),
    wavelength.property ? Math.hypot(wavelength.property.value, wavelength.property.uncertainty) : UNCHECKED_AXIS,
  );
  const outcomes = [wavelength, scale, dark, baseline, resolution, cells];
  const tests = outcomes.flatMap((outcome) => outcome.tests);
  const record: InstrumentRecord = {
    schema: 'tankhue/instrument/1',
    instrument: options.instrument,
    checkedAt: options.checkedAt,
    state: worstConformity(tests.map(({ conformity }) => conformity)),
    wavelengthShift: wavelength.property,
    offsetPrior: baseline.property.offsetPrior,
    slopePrior: baseline.property.slopePrior,
    strayLight: dark.property,
    photometricScale: scale.property,
    noise: baseline.property.noise,
    cells: cells.property,
    tests,
    consequences: [],
    findings: [...outcomes.flatMap((outcome) => outcome.findings), ...offTemperature(scans), ...untested(scans)],
    assumed: [
      ...options.assumed,
      'limits are kept or broken only past a guard band of 1.96 standard uncertainties (JCGM 106); between is undecided',
      ...(wavelength.property
        ? []
        : [`the wavelength axis is good to ${UNCHECKED_AXIS} nm (k = 1), because holmium was not scanned`]),
    ],
    inputs: inputsOf(scans),
  };
  return { ...record, consequences: instrumentConsequences(record, models) };
}

/** K between scan and certificate that are passed over [common practice]. */
const TEMPERATURE_TOLERANCE = 2;

/** Certificates of another temperature: said, never corrected, because no coefficient is at hand. */
function offTemperature(scans: readonly InstrumentScan[]): Finding[] {
  return scans.flatMap(({ test, spectrum, temperatures }) => {
    if (!temperatures || Math.abs(temperatures.scanned - temperatures.certified) <= TEMPERATURE_TOLERANCE) return [];
    const [scanned, certified] = [temperatures.scanned, temperatures.certified].map((t) =>
      celsiusFromKelvin(t).toFixed(1),
    );
    return [
      {
        code: 'temperature-off',
        severity: 'caution' as const,
        message: `expected ${test} ${spectrum.name} at the certificate's ${certified} °C, within ${TEMPERATURE_TOLERANCE} K; received ${scanned} °C: nothing was corrected`,
        hint: 'bring solution and photometer to that temperature and scan again, or use a certificate for yours',
      },
    ];
  });
}

/** What an assay leans on and nobody looked at. */
function untested(scans: readonly InstrumentScan[]): Finding[] {
  const wanted: readonly [readonly InstrumentScan['test'][], string][] = [
    [['holmium'], 'wavelength axis (holmium oxide solution)'],
    [['dichromate-perchloric', 'dichromate-sulfuric'], 'absorbance scale (potassium dichromate)'],
    [['cut-off'], 'stray light (cut-off solution or filter)'],
    [['blank'], 'noise and drift (repeated blanks)'],
  ];
  const missing = wanted.filter(([tests]) => !scans.some((scan) => tests.includes(scan.test))).map(([, name]) => name);
  if (missing.length === 0) return [];
  return [
    {
      code: 'not-tested',
      severity: 'note',
      message: `expected every part of the photometer to be checked; received no scan for: ${missing.join(', ')}`,
      hint: 'later assays keep the usual priors for these',
    },
  ];
}

function inputsOf(scans: readonly InstrumentScan[]): InstrumentRecord['inputs'] {
  const spectra = scans.flatMap((scan): Spectrum[] => [
    scan.spectrum,
    ...('blank' in scan && scan.blank ? [scan.blank] : []),
    ...('reference' in scan ? [scan.reference] : []),
  ]);
  const seen = new Map(spectra.map(({ origin }) => [`${origin.file}\n${origin.column}`, origin]));
  return [...seen.values()].map(({ file, column, sha256 }) => ({ file, column, sha256 }));
}
