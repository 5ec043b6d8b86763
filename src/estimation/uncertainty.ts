// What        Covariance of the two concentrations of a solution.
// Equation    C = H⁻¹ + h·H⁻¹ I H⁻¹, H = I + priors, I = JᵀΣ⁻¹J, h = ℓ² yᵀ(FᵀF)⁻¹y.
// Why so      H⁻¹ holds noise, modes, path and wavelength; the spectra of a calibration are estimates from the same kind of residuals, so a
//             prediction at amounts y carries h times their covariance more. Extrapolation widens the answer by itself.
// Valid for   residuals of standards and samples alike.
// Units       mol²/L² in the cuvette; state of charge (share of the higher species) 1.
// Source      variance of a least-squares prediction; JCGM 100.
import { newAmounts } from '../electrolyte/forwardModel.ts';
import type { Prepared } from './prepare.ts';
import type { Solution } from './solve.ts';

/** Leverage h of the standards on a prediction at this composition: 0.1 well inside them, above 1 where they say little. */
export function calibrationLeverage(prepared: Prepared, solution: Solution, pathLength: number): number {
  const k = prepared.amountCount;
  const { amount } = prepared.amounts(solution.lower, solution.higher, newAmounts(k));
  const inverse = prepared.model.designInverse;
  let sum = 0;
  for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) sum += amount[i]! * inverse[i * k + j]! * amount[j]!;
  return sum * pathLength * pathLength;
}

/** H⁻¹ I H⁻¹ for the concentrations, row-major 2 × 2: the part of the covariance that noise and modes make. */
export function spectralCovariance(solution: Solution): Float64Array {
  const { covariance: c, information: f } = solution;
  const out = new Float64Array(4);
  for (let i = 0; i < 2; i++)
    for (let j = 0; j < 2; j++) {
      let sum = 0;
      for (let p = 0; p < 4; p++) for (let q = 0; q < 4; q++) sum += c[i * 4 + p]! * f[p * 4 + q]! * c[q * 4 + j]!;
      out[i * 2 + j] = sum;
    }
  return out;
}

/** Covariance of (lower, higher), row-major 2 × 2, mol²/L² in the cuvette. */
export function concentrationCovariance(prepared: Prepared, solution: Solution, pathLength: number): Float64Array {
  const leverage = calibrationLeverage(prepared, solution, pathLength);
  const spectral = spectralCovariance(solution);
  return Float64Array.of(
    solution.covariance[0]! + leverage * spectral[0]!,
    solution.covariance[1]! + leverage * spectral[1]!,
    solution.covariance[4]! + leverage * spectral[2]!,
    solution.covariance[5]! + leverage * spectral[3]!,
  );
}

/** Share of the higher species and the total, with standard uncertainties from a 2 × 2 covariance. */
export function shareAndTotal(
  lower: number,
  higher: number,
  covariance: Float64Array,
): { share: number; shareUncertainty: number; total: number; totalUncertainty: number } {
  const total = lower + higher;
  const [caa, cab, , cbb] = covariance as unknown as [number, number, number, number];
  const ga = -higher / total ** 2;
  const gb = lower / total ** 2;
  return {
    share: higher / total,
    shareUncertainty: Math.sqrt(Math.max(0, ga * ga * caa + 2 * ga * gb * cab + gb * gb * cbb)),
    total,
    totalUncertainty: Math.sqrt(Math.max(0, caa + 2 * cab + cbb)),
  };
}
