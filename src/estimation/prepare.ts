// What        A spectrum reduced to the few numbers that its composition depends on.
// Equation    Σ = σ²I + GGᵀ (noise + modes), whitened basis B = Σ^(−½)[e_1 … e_k | −e_1′ … −e_k′] = QR, z = QᵀΣ^(−½)A.
// Why so      z (2k numbers) and the residual norm carry all a spectrum says about concentrations, path and wavelength shift, so the
//             non-linear problem is solved in 2k dimensions however many wavelengths there are. With GGᵀ = U diag(s²) Uᵀ the symmetric
//             root is Σ^(−½) = (I − U diag(1 − (1 + s²/σ²)^(−½)) Uᵀ)/σ: no n × n matrix is ever formed.
// Valid for   any number of wavelengths above the number of absorbing amounts. Path and dilution rescale; only a new axis or a new mask
//             of wavelengths needs a new preparation.
// Units       absorbance in, whitened (unit variance) out.
// Source      generalised least squares; Woodbury identity.
import { amountsOf, type AmountsFunction } from '../electrolyte/forwardModel.ts';
import { TankhueError } from '../errors.ts';
import { dot, thinQrOfRows } from '../numerics/gramSchmidt.ts';
import type { NamedMode, PairModel } from './pairModel.ts';

/** Everything that `solve` needs, computed once per calibration, wavelength mask and set of named modes. */
export interface Prepared {
  readonly model: PairModel;
  readonly named: readonly NamedMode[];
  /** indices into the model's axis of the wavelengths in use */
  readonly used: Int32Array;
  readonly amounts: AmountsFunction;
  /** k: absorbing amounts */
  readonly amountCount: number;
  /** 2k */
  readonly dimension: number;
  /** rows of QᵀΣ^(−½), each as long as `used` */
  readonly projector: readonly Float64Array[];
  /** z of each unit spectrum, then of each unit spectrum shifted by 1 nm: `dimension` numbers each */
  readonly image: readonly Float64Array[];
  /** Σ^(−½) in factored form */
  readonly whitening: Whitening;
}

/** x ↦ (x − Σ_j shrink_j (u_j·x) u_j)/σ */
export interface Whitening {
  readonly noise: number;
  readonly directions: readonly Float64Array[];
  readonly shrink: Float64Array;
}

/** Share of a mode's variance below which it is noise and is dropped. */
const NEGLIGIBLE = 1e-6;

/**
 * @param usable one flag per wavelength of the model: false where this spectrum has no value
 * @throws TankhueError `too-few-wavelengths`
 */
export function prepare(model: PairModel, named: readonly NamedMode[], usable?: ArrayLike<unknown>): Prepared {
  const used = Int32Array.from(model.wavelength.keys()).filter((i) => !usable || Boolean(usable[i]));
  const amountCount = model.spectra.length;
  if (used.length < 2 * amountCount + 2)
    throw new TankhueError(
      'too-few-wavelengths',
      `expected at least ${2 * amountCount + 2} usable wavelengths for ${model.pair}; received ${used.length}`,
      'spectrum',
      'scan the whole range of the calibration; use a thinner cell or dilute where the spectrum is too dark',
    );
  const pick = (row: Float64Array): Float64Array => Float64Array.from(used, (i) => row[i]!);
  const scaledModes = [
    ...model.modes.map(pick),
    ...named.map((mode) => pick(mode.shape).map((value) => value * mode.prior)),
  ];
  const whitening = whiteningOf(scaledModes, model.noise);
  const basis = [
    ...model.spectra.map(pick),
    ...model.spectra.map((spectrum) => pick(shiftedByOneNanometre(model.wavelength, spectrum))),
  ].map((row) => whiten(whitening, row));
  const qr = thinQrOfRows(basis);
  const dimension = basis.length;
  return {
    model,
    named,
    used,
    amounts: amountsOf(model.pair, model.associations),
    amountCount,
    dimension,
    projector: qr.q.map((row) => whiten(whitening, row)),
    image: basis.map((_, j) => Float64Array.from({ length: dimension }, (_unused, i) => qr.r[i * dimension + j]!)),
    whitening,
  };
}

/** Change of a spectrum when the instrument's axis reads 1 nm too long: −∂/∂λ, central differences on the model's axis. */
export function shiftedByOneNanometre(wavelength: Float64Array, spectrum: Float64Array): Float64Array {
  const last = wavelength.length - 1;
  return spectrum.map((_, i) => {
    const below = Math.max(0, i - 1);
    const above = Math.min(last, i + 1);
    return -(spectrum[above]! - spectrum[below]!) / (wavelength[above]! - wavelength[below]!);
  });
}

/** Orthogonal directions of Σ_j g_j g_jᵀ by one-sided Jacobi rotations of the mode vectors themselves. */
function whiteningOf(modes: readonly Float64Array[], noise: number): Whitening {
  const columns = modes.map((mode) => Float64Array.from(mode));
  orthogonalise(columns);
  const kept = columns
    .map((column) => ({ column, variance: dot(column, column) }))
    .filter(({ variance }) => variance > NEGLIGIBLE * noise * noise);
  return {
    noise,
    directions: kept.map(({ column, variance }) => column.map((value) => value / Math.sqrt(variance))),
    shrink: Float64Array.from(kept, ({ variance }) => 1 - 1 / Math.sqrt(1 + variance / (noise * noise))),
  };
}

/** One-sided Jacobi: rotates pairs of vectors until all are orthogonal; their sum of outer products stays what it was. */
function orthogonalise(columns: Float64Array[]): void {
  for (let sweep = 0; sweep < 30; sweep++) {
    let rotated = false;
    for (let i = 0; i < columns.length; i++)
      for (let j = i + 1; j < columns.length; j++) {
        const x = columns[i]!;
        const y = columns[j]!;
        const xx = dot(x, x);
        const yy = dot(y, y);
        const xy = dot(x, y);
        if (Math.abs(xy) <= 1e-13 * Math.sqrt(xx * yy) || xx === 0 || yy === 0) continue;
        rotated = true;
        const zeta = (yy - xx) / (2 * xy);
        const t = Math.sign(zeta || 1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
        const c = 1 / Math.sqrt(1 + t * t);
        const s = c * t;
        for (let l = 0; l < x.length; l++) {
          const xl = x[l]!;
          x[l] = c * xl - s * y[l]!;
          y[l] = s * xl + c * y[l]!;
        }
      }
    if (!rotated) return;
  }
}

/** Σ^(−½)·row for a row on the used wavelengths. */
export function whiten(whitening: Whitening, row: Float64Array): Float64Array {
  const out = Float64Array.from(row);
  whitening.directions.forEach((direction, j) => {
    const projection = whitening.shrink[j]! * dot(direction, row);
    for (let l = 0; l < out.length; l++) out[l]! -= projection * direction[l]!;
  });
  for (let l = 0; l < out.length; l++) out[l]! /= whitening.noise;
  return out;
}
