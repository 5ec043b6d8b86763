// What        What a finished fit says of its own weakness.
// Equation    cells: mean of found/label − 1 of the total per nominal path, against the paths' stated uncertainties; check standards: share
//             found − label against 1.96 × √(u² + between-group variance).
// Why so      A number that nothing backs must not look like the others.
// Valid for   one pair.
// Units       share 1, total relative, path cm.
// Source      common practice, no source (limits).
import type { Finding } from '../finding.ts';
import { speciesOfPair } from '../electrolyte/species.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import { millimetresFromCentimetres } from '../units.ts';
import type { PairCalibration } from './calibration.ts';
import type { PairFit, PairStandard } from './fitPair.ts';
import { NO_WEAK_DIRECTION } from './pairRecord.ts';
import { predict } from './validate.ts';

const Z = 1.96;

/** @param checks standards that were not fitted */
export function fitFindings(
  record: PairCalibration,
  fit: PairFit,
  checks: readonly PairStandard[],
  priors: ModePriors,
): Finding[] {
  const { pair, design, labelsMoved, leftOut } = record;
  const findings: Finding[] = [];
  if (!fit.converged)
    findings.push({
      code: 'not-converged',
      severity: 'caution',
      message: `${pair}: the fit of paths${labelsMoved ? ' and labels' : ''} still moved after its last round`,
      hint: 'look at the standards with the largest movement; one of them may be from another cell',
    });
  if (leftOut.length === 0)
    findings.push({
      code: 'not-validated',
      severity: 'caution',
      message: `${pair}: ${fit.rows.length} standards leave none to validate with; the uncertainty between preparations is assumed, not measured`,
      hint: 'make standards until one preparation can be left out: seven shares at three totals',
    });
  if (design.weak !== NO_WEAK_DIRECTION)
    findings.push({
      code: 'design-weak',
      severity: 'caution',
      message: `${pair}: ${design.weak}`,
      hint: 'tankhue plan standards says which standards would mend it',
    });
  return [...findings, ...cellFindings(pair, fit, priors), ...checkFindings(record, fit, checks, priors)];
}

/** Standards of one pair in cells of several paths: their errors of path are not the same. */
function cellFindings(pair: string, fit: PairFit, priors: ModePriors): Finding[] {
  const cells = [...new Set(fit.rows.map((row) => row.pathLength))].sort((a, b) => a - b);
  if (cells.length < 2) return [];
  const found = predict(fit, fit.rows, priors, false);
  const readings = cells.map((pathLength) => {
    const members = [...fit.rows.keys()].filter((i) => fit.rows[i]!.pathLength === pathLength);
    const mean = (values: readonly number[]): number => values.reduce((sum, x) => sum + x, 0) / values.length;
    return {
      pathLength,
      error: mean(members.map((i) => found[i]!.totalError)),
      uncertainty: mean(members.map((i) => fit.rows[i]!.pathUncertainty)),
    };
  });
  const least = readings.reduce((a, b) => (a.error <= b.error ? a : b));
  const most = readings.reduce((a, b) => (a.error >= b.error ? a : b));
  const apart = most.error - least.error;
  const disagree = apart > 2 * Math.hypot(least.uncertainty, most.uncertainty);
  const millimetres = ({ pathLength }: { pathLength: number }): string =>
    `${Number(millimetresFromCentimetres(pathLength).toPrecision(6))} mm`;
  return [
    {
      code: disagree ? 'cells-disagree' : 'mixed-cells',
      severity: disagree ? 'caution' : 'note',
      message: `${pair}: standards lie in cells of ${readings.map(millimetres).join(', ')}; ${millimetres(most)} reads ${(100 * apart).toFixed(1)} % more vanadium than ${millimetres(least)}`,
      hint: disagree
        ? 'measure the paths of the cells (tankhue verify), or make all standards of a pair in one cell'
        : 'the cells agree within their stated paths',
    },
  ];
}

function checkFindings(
  { pair, betweenGroup, labelsMoved }: PairCalibration,
  fit: PairFit,
  checks: readonly PairStandard[],
  priors: ModePriors,
): Finding[] {
  const [, higher] = speciesOfPair(pair);
  return predict(fit, checks, priors, labelsMoved).flatMap((one) => {
    const limit = Z * Math.hypot(one.shareUncertainty, betweenGroup.share);
    if (Math.abs(one.shareError) <= limit) return [];
    return [
      {
        code: 'check-standard-out',
        severity: 'caution' as const,
        message: `check standard ${one.name} reads ${(100 * one.shareError).toFixed(1)} points of ${higher} off its label; 95 % of sound ones stay within ${(100 * limit).toFixed(1)}`,
        hint: 'measure it again; if it stays off, either it or the calibration is wrong',
      },
    ];
  });
}
