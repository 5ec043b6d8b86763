// What        Error of the wavelength axis from the bands of holmium oxide solution.
// Equation    d_i = seen − listed; shift = Σ w_i d_i / Σ w_i, w_i = 1/(u²(seen) + u²(bandwidth));
//             u² = max(1, Birge²)/Σ w_i + u²(solution).
// Why so      what the bands share (the solution's own list) does not average away, what scatters does. The Birge ratio widens u when
//             the bands disagree by more than they should.
// Valid for   steps of 1 nm or finer, bandwidths of 0.1 to 3 nm. An assay runs from about 350 nm: bands from 330 nm decide the shift
//             when there are any; every band in the scan is judged.
// Units       nm; instrument minus truth.
// Source      bands: see `photometricStandards.ts`; permitted error: European Pharmacopoeia 2.2.25.
import type { InstrumentTest, MeasuredProperty } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { mean, weightedMean } from '../../numerics/meanAndDeviation.ts';
import { fitLinear } from '../../numerics/linearFit.ts';
import { studentQuantile } from '../../numerics/distributions.ts';
import { bandPosition } from './bandPositions.ts';
import {
  HOLMIUM_BANDS,
  HOLMIUM_BANDWIDTH_UNCERTAINTY,
  HOLMIUM_LIST_UNCERTAINTY,
  permittedWavelengthError,
} from './photometricStandards.ts';
import type { HolmiumScan } from './scans.ts';
import { judged, type TestOutcome } from './testOutcome.ts';

const ASSAY_FROM = 330;
/** nm; neighbouring bands are at least 8 nm apart */
const REACH = 4;

/** @param ownLimit nm; null = the pharmacopoeia's */
export function wavelengthScale(
  scans: readonly HolmiumScan[],
  ownLimit: number | null = null,
): TestOutcome<MeasuredProperty | null> {
  const seen = scans.flatMap(({ spectrum }) => bandsSeen(spectrum));
  const findings: Finding[] = scans.flatMap(({ spectrum }) => doubtsAboutScan(spectrum));
  const tests = seen.map(({ band, difference, uncertainty }): InstrumentTest =>
    judged(
      {
        test: 'holmium',
        property: `${band} nm band`,
        unit: 'nm',
        value: difference,
        uncertainty: Math.hypot(uncertainty, HOLMIUM_LIST_UNCERTAINTY),
        limitSource: `${ownLimit === null ? 'European Pharmacopoeia 2.2.25' : 'as asked'}; band positions from memory`,
      },
      [-1, 1].map((side) => side * (ownLimit ?? permittedWavelengthError(band))) as [number, number],
    ),
  );
  const inAssayRange = seen.filter(({ band }) => band >= ASSAY_FROM);
  const deciding = inAssayRange.length > 0 ? inAssayRange : seen;
  return {
    property: deciding.length > 0 ? meanShift(deciding) : null,
    tests,
    findings: [...findings, ...stretchOf(deciding)],
  };
}

interface SeenBand {
  readonly band: number;
  readonly difference: number;
  /** without what all bands share */
  readonly uncertainty: number;
}

function bandsSeen(spectrum: HolmiumScan['spectrum']): SeenBand[] {
  return bandsWithin(spectrum).flatMap((band) => {
    const found = bandPosition(spectrum, band, REACH);
    if (!found) return [];
    return [
      {
        band,
        difference: found.position - band,
        uncertainty: Math.hypot(found.uncertainty, HOLMIUM_BANDWIDTH_UNCERTAINTY),
      },
    ];
  });
}

const bandsWithin = ({ wavelength }: HolmiumScan['spectrum']): number[] =>
  HOLMIUM_BANDS.filter((band) => band - REACH >= wavelength[0]! && band + REACH <= wavelength[wavelength.length - 1]!);

function doubtsAboutScan(spectrum: HolmiumScan['spectrum']): Finding[] {
  const expected = bandsWithin(spectrum);
  const missing = expected.filter((band) => bandPosition(spectrum, band, REACH) === null);
  if (expected.length > 0 && missing.length === 0) return [];
  return [
    {
      code: 'bands-missing',
      severity: 'caution',
      message: `expected the holmium bands at ${expected.length > 0 ? expected.join(', ') : HOLMIUM_BANDS.join(', ')} nm; received none near ${missing.length > 0 ? missing.join(', ') : 'any of them'}`,
      hint: 'scan holmium oxide solution (not glass) in steps of 0.5 nm or finer, in a 10 mm cell, bandwidth 3 nm or less',
    },
  ];
}

function meanShift(bands: readonly SeenBand[]): MeasuredProperty {
  const { value, uncertainty } = weightedMean(
    bands.map(({ difference }) => difference),
    bands.map((band) => band.uncertainty),
  );
  return { value, uncertainty: Math.hypot(uncertainty, HOLMIUM_LIST_UNCERTAINTY) };
}

/** One shift for the whole axis is an approximation: says when the axis is stretched instead. */
function stretchOf(bands: readonly SeenBand[]): Finding[] {
  if (bands.length < 4) return [];
  const middle = mean(bands.map(({ band }) => band));
  const weight = Float64Array.from(bands, ({ uncertainty }) => 1 / uncertainty);
  const fit = fitLinear(
    [weight, weight.map((w, i) => (w * (bands[i]!.band - middle)) / 100)],
    weight.map((w, i) => w * bands[i]!.difference),
  );
  const stretch = fit.coefficients[1]!;
  const uncertainty = fit.standardErrors[1]!;
  if (Math.abs(stretch) < studentQuantile(0.995, bands.length - 2) * uncertainty || Math.abs(stretch) < 0.05) return [];
  return [
    {
      code: 'wavelength-scale-stretched',
      severity: 'caution',
      message: `expected one shift for all wavelengths; received a shift that changes by ${stretch.toFixed(2)} ± ${uncertainty.toFixed(2)} nm per 100 nm (k = 1)`,
      hint: 'have the wavelength axis adjusted; until then the shift holds for the middle of the range only',
    },
  ];
}
