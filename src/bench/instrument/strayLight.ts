// What        Stray light where a cut-off solution or filter lets nothing through.
// Equation    T_obs = (T + s)/(1 + s) with T → 0, so s = T_obs/(1 − T_obs), T_obs the mean transmittance over the opaque range.
// Why so      transmittances are averaged, not absorbances: noise is symmetric in T and not in A.
// Valid for   a range where the true absorbance is 4 or more. Stray light differs between wavelengths: that measured nearest to the
//             range of an assay (400-900 nm) is kept.
// Units       s: share of the beam.
// Source      any text on instrumental analysis; ASTM E387; limits see `photometricStandards.ts`.
import type { InstrumentRecord } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { mean, standardDeviation } from '../../numerics/meanAndDeviation.ts';
import type { CutOffScan } from './scans.ts';
import { judged, type TestOutcome } from './testOutcome.ts';

const ASSAY_RANGE = [400, 900] as const;

export function strayLight(scans: readonly CutOffScan[]): TestOutcome<InstrumentRecord['strayLight']> {
  const seen = scans.map((scan) => ({ scan, dark: darkness(scan) }));
  const measured = seen.flatMap(({ scan, dark }) => (dark ? [{ scan, ...dark }] : []));
  const nearest = measured.reduce<(typeof measured)[number] | null>(
    (best, each) => (best && distanceToAssay(best.nm) <= distanceToAssay(each.nm) ? best : each),
    null,
  );
  return {
    property: nearest && { ...nearest.share, nm: nearest.nm },
    tests: measured.map(({ scan, transmittance }) =>
      judged(
        {
          test: 'cut-off',
          property: `absorbance of ${scan.name}, ${scan.opaque.join('-')} nm`,
          unit: 'A',
          value: -Math.log10(transmittance.value),
          uncertainty: transmittance.uncertainty / (transmittance.value * Math.LN10),
          limitSource: scan.limitSource,
        },
        [scan.least, Infinity],
      ),
    ),
    findings: seen.flatMap(({ scan, dark }) => (dark ? [] : [unmeasured(scan)])),
  };
}

const distanceToAssay = (nm: number): number => Math.max(0, ASSAY_RANGE[0] - nm, nm - ASSAY_RANGE[1]);

/** @returns null where the instrument gives no number at all, or no light beyond noise */
function darkness({ spectrum, opaque }: CutOffScan) {
  const transmittances: number[] = [];
  spectrum.wavelength.forEach((nm, i) => {
    const absorbance = spectrum.absorbance[i]!;
    if (nm >= opaque[0] && nm <= opaque[1] && Number.isFinite(absorbance)) transmittances.push(10 ** -absorbance);
  });
  if (transmittances.length < 3) return null;
  const average = mean(transmittances);
  const uncertainty = standardDeviation(transmittances) / Math.sqrt(transmittances.length);
  return {
    nm: (opaque[0] + opaque[1]) / 2,
    transmittance: { value: average, uncertainty },
    share: { value: average / (1 - average), uncertainty: uncertainty / (1 - average) ** 2 },
  };
}

const unmeasured = ({ name, opaque }: CutOffScan): Finding => ({
  code: 'stray-light-not-measured',
  severity: 'caution',
  message: `expected 3 absorbances or more for ${name} between ${opaque[0]} and ${opaque[1]} nm; received fewer: the instrument gives no number there, or the scan does not reach it`,
  hint: 'scan that range, and export numbers instead of over-range marks if the instrument can',
});
