// What        What each standard did in the fit, and which ones are in doubt.
// Equation    share doubt = share found by the finished calibration − label; suspicious above 3 × the robust scatter of its pair and 1 point.
//             Influence on a mid-range sample: −gain·ℓ yᵀ(FᵀF)⁻¹ f r/(1 − h), the change when this standard alone is left out.
// Why so      A standard that misses by two points where its neighbours miss by a few tenths is a mixing error, not noise; it is named with
//             the likeliest reason and never dropped.
// Valid for   pairs of five standards or more; below that nobody is accused.
// Units       share 1.
// Source      leverage and deletion formula of linear least squares; limits ours.
import type { Finding } from '../finding.ts';
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { speciesOfPair } from '../electrolyte/species.ts';
import { namedModes, type ModePriors } from '../estimation/namedModes.ts';
import { prepare } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import type { PairCalibration, StandardRecord } from './calibration.ts';
import type { PairFit, PairStandard, PairStandards } from './fitPair.ts';
import type { Standard } from './standard.ts';

const SUSPICIOUS = 3;
const SMALLEST_DOUBT = 0.01;

export function standardRecords(
  standards: PairStandards,
  used: readonly Standard[],
  fit: PairFit,
  record: PairCalibration,
  priors: ModePriors,
): { records: StandardRecord[]; doubts: Finding[] } {
  const prepared = prepare(record.model, namedModes(record.model.wavelength, priors));
  const fittedRows = standards.rows.filter((_, i) => used[i]!.role === 'calibration');
  const found = standards.rows.map((row) =>
    solve(prepared, reduce(prepared, row.absorbance), {
      pathLength: row.pathLength,
      pathUncertainty: row.pathUncertainty,
      wavelengthUncertainty: priors.wavelengthShift,
    }),
  );
  const doubt = standards.rows.map((row, i) => found[i]!.higher / (found[i]!.lower + found[i]!.higher) - shareOf(row));
  const scatter = robustScatter(doubt.filter((_, i) => used[i]!.role === 'calibration'));
  const [lower, higher] = speciesOfPair(standards.pair);
  const doubts: Finding[] = [];
  const records = standards.rows.map((row, i): StandardRecord => {
    const standard = used[i]!;
    const fitted = fittedRows.findIndex((candidate) => candidate.name === row.name);
    const moved = fitted >= 0 ? fit.moved[fitted]! : { path: found[i]!.pathShift, lower: 0, higher: 0 };
    const residual = fitted >= 0 ? fit.residuals[fitted]! : null;
    const reason = fittedRows.length >= 5 ? reasonFor(row, doubt, i, moved.path, scatter, standards.rows) : null;
    if (reason)
      doubts.push({
        code: 'standard-in-doubt',
        severity: 'caution',
        message: `standard ${row.name} reads ${(100 * doubt[i]!).toFixed(1)} points of ${higher} off its label, its neighbours ${(100 * scatter).toFixed(1)}: ${reason}`,
        hint: `remake or measure it again; leave it out by decision with --without "${row.name}"`,
      });
    return {
      name: row.name,
      pair: standards.pair,
      role: standard.role,
      group: row.group,
      file: standard.spectrum.origin.file,
      column: standard.spectrum.origin.column,
      sha256: standard.spectrum.origin.sha256,
      path: row.pathLength,
      dilution: standard.dilution,
      concentration: { [lower]: standard.concentration[lower], [higher]: standard.concentration[higher] },
      pathMoved: moved.path,
      pathMovedInUncertainty: moved.path / row.pathUncertainty,
      shareDoubt: doubt[i]!,
      shareDoubtInUncertainty: doubt[i]! / Math.max(scatter, 1e-6),
      leverage: fitted >= 0 ? fit.linear.leverage[fitted]! : 0,
      residualRms: residual ? Math.sqrt(dot(residual, residual) / residual.length) : 0,
      influence: fitted >= 0 ? influenceOf(fitted, fittedRows, fit, prepared) : 0,
      doubt: reason,
    };
  });
  return { records, doubts };
}

const shareOf = (row: PairStandard): number => row.higher / (row.lower + row.higher);

/** 1.4826 × median absolute deviation from zero, at least a tenth of a point. */
function robustScatter(doubt: readonly number[]): number {
  const sorted = doubt.map(Math.abs).sort((a, b) => a - b);
  return Math.max(0.001, 1.4826 * (sorted[Math.floor(sorted.length / 2)] ?? 0));
}

function reasonFor(
  row: PairStandard,
  doubt: readonly number[],
  index: number,
  pathMoved: number,
  scatter: number,
  rows: readonly PairStandard[],
): string | null {
  const miss = doubt[index]!;
  if (Math.abs(pathMoved) > 4 * row.pathUncertainty)
    return `its path would have to be ${(100 * pathMoved).toFixed(0)} % off: wrong cell, or the wrong total on the label`;
  if (Math.abs(miss) < Math.max(SMALLEST_DOUBT, SUSPICIOUS * scatter)) return null;
  const found = shareOf(row) + miss;
  const twin = rows.findIndex(
    (other, j) =>
      j !== index &&
      Math.abs(shareOf(other) - found) < 2 * scatter &&
      Math.abs(shareOf(other) + doubt[j]! - shareOf(row)) < 2 * scatter &&
      Math.abs(doubt[j]!) > SUSPICIOUS * scatter,
  );
  if (twin >= 0) return `its label and that of ${rows[twin]!.name} seem to be swapped`;
  if (Math.abs(1 - shareOf(row) - found) < 2 * scatter) return 'its two concentrations seem to be swapped on the label';
  return 'mixed wrong, or partly oxidised before the scan';
}

/** Change of the share of a half-and-half sample at the mean total and path when this standard alone goes, paths and constants held. */
function influenceOf(
  index: number,
  rows: readonly PairStandard[],
  fit: PairFit,
  prepared: ReturnType<typeof prepare>,
): number {
  const total = rows.reduce((sum, row) => sum + row.lower + row.higher, 0) / rows.length;
  const pathLength = rows.reduce((sum, row) => sum + row.pathLength, 0) / rows.length;
  const k = prepared.amountCount;
  const middle = prepared.amounts(total / 2, total / 2, newAmounts(k)).amount.slice();
  const row = rows[index]!;
  const own = prepared.amounts(row.lower, row.higher, newAmounts(k)).amount;
  const scale = row.pathLength * Math.exp(fit.moved[index]!.path);
  let weight = 0;
  for (let i = 0; i < k; i++)
    for (let j = 0; j < k; j++) weight += middle[i]! * fit.linear.inverse[i * k + j]! * own[j]! * scale;
  const factor = (pathLength * weight) / Math.max(1e-6, 1 - fit.linear.leverage[index]!);
  const absorbance = new Float64Array(prepared.used.length);
  const change = new Float64Array(prepared.used.length);
  for (let l = 0; l < absorbance.length; l++) {
    for (let j = 0; j < k; j++) absorbance[l]! += pathLength * middle[j]! * prepared.model.spectra[j]![l]!;
    change[l] = absorbance[l]! + factor * fit.residuals[index]![l]!;
  }
  const priors = { pathLength, pathUncertainty: 0, wavelengthUncertainty: 0 };
  const before = solve(prepared, reduce(prepared, absorbance), priors);
  const after = solve(prepared, reduce(prepared, change), priors);
  return after.higher / (after.lower + after.higher) - before.higher / (before.lower + before.higher);
}
