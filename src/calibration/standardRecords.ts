// What        What each standard did in the fit, and which ones are in doubt.
// Equation    share doubt = share found by a fit of the standards nobody doubts − label. Influence on a mid-range sample:
//             −gain·ℓ yᵀ(FᵀF)⁻¹ f r/(1 − h), the change when this standard alone is left out.
// Why so      A standard that misses by two points where its neighbours miss by a few tenths is a mixing error, not noise; it is named with
//             the likeliest reason and never dropped.
// Valid for   pairs of five standards or more; below that nobody is accused.
// Units       share 1.
// Source      leverage and deletion formula of linear least squares.
import type { Finding } from '../finding.ts';
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { speciesOfPair } from '../electrolyte/species.ts';
import { namedModes, type ModePriors } from '../estimation/namedModes.ts';
import { prepare } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import type { PairCalibration, StandardRecord } from './calibration.ts';
import { doubtReason, findIn, shareOf, type Found } from './doubtReason.ts';
import type { Doubts } from './doubts.ts';
import type { PairFit, PairStandard, PairStandards } from './fitPair.ts';
import type { Standard } from './standard.ts';

export function standardRecords(
  standards: PairStandards,
  used: readonly Standard[],
  fit: PairFit,
  record: PairCalibration,
  doubts: Doubts,
  priors: ModePriors,
): { records: StandardRecord[]; findings: Finding[] } {
  const prepared = prepare(record.model, namedModes(record.model.wavelength, priors));
  const undoubted = prepare(doubts.fit.model, namedModes(record.model.wavelength, priors));
  const fittedRows = standards.rows.filter((_, i) => used[i]!.role === 'calibration');
  const found = standards.rows.map((row) => findIn(undoubted, row, priors));
  const accused = found.filter(({ row }) => doubts.doubted.has(row.name));
  const reasons = new Map(accused.map((one) => [one.row.name, doubtReason(one, accused)]));
  const [lower, higher] = speciesOfPair(standards.pair);
  const records = standards.rows.map((row, i): StandardRecord => {
    const standard = used[i]!;
    const fitted = fittedRows.findIndex((candidate) => candidate.name === row.name);
    const path = fitted >= 0 ? fit.moved[fitted]!.path : found[i]!.pathShift;
    const residual = fitted >= 0 ? fit.residuals[fitted]! : null;
    const doubt = found[i]!.share - shareOf(row);
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
      pathMoved: path,
      pathMovedInUncertainty: path / row.pathUncertainty,
      shareDoubt: doubt,
      shareDoubtInUncertainty: doubt / doubts.scatter,
      leverage: fitted >= 0 ? fit.linear.leverage[fitted]! : 0,
      residualRms: residual ? Math.sqrt(dot(residual, residual) / residual.length) : 0,
      influence: fitted >= 0 ? influenceOf(fitted, fittedRows, fit, prepared) : 0,
      doubt: reasons.get(row.name) ?? null,
    };
  });
  return {
    records,
    findings: accused.map((one) => accusation(one, reasons.get(one.row.name)!, higher, doubts.scatter)),
  };
}

const accusation = ({ row, share, totalError }: Found, reason: string, higher: string, scatter: number): Finding => ({
  code: 'standard-in-doubt',
  severity: 'caution',
  message: `standard ${row.name} reads ${(100 * (share - shareOf(row))).toFixed(1)} points of ${higher} and ${(100 * totalError).toFixed(1)} % of vanadium off its label, the others scatter by ${(100 * scatter).toFixed(1)} points: ${reason}`,
  hint: `remake or measure it again; leave it out by decision with --without "${row.name}"`,
});

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
