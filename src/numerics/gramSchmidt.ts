// What        Thin QR of a set of vectors, one after the other: v_j = Σ_i R_ij q_i, q orthonormal.
// Equation    modified Gram-Schmidt, each vector orthogonalised twice.
// Why so      One pass loses orthogonality with the condition of the set, two passes do not ("twice is enough"); the vectors are rows in
//             typed arrays, so that the same code serves a handful of spectra of any length without copying into a matrix object.
// Valid for   a few vectors of any length. A vector that is dependent on those before it (relative norm below 1e-12) gets a zero row.
// Units       those of the vectors, in R.
// Source      Giraud, Langou, Rozložník, Numer. Math. 2005, 101, 87 (twice is enough).

export interface ThinQr {
  /** orthonormal rows, as many as vectors; zero for a dependent one */
  readonly q: Float64Array[];
  /** upper triangle, row-major count × count: vector j = Σ_i r[i·count + j] q_i */
  readonly r: Float64Array;
  /** indices of vectors found dependent on those before them */
  readonly dependent: number[];
}

const DEPENDENT = 1e-12;

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

export function thinQrOfRows(vectors: readonly Float64Array[]): ThinQr {
  const count = vectors.length;
  const q: Float64Array[] = [];
  const r = new Float64Array(count * count);
  const dependent: number[] = [];
  vectors.forEach((vector, j) => {
    const v = Float64Array.from(vector);
    const norm = Math.sqrt(dot(v, v));
    for (let pass = 0; pass < 2; pass++)
      for (let i = 0; i < j; i++) {
        const projection = dot(q[i]!, v);
        r[i * count + j]! += projection;
        for (let l = 0; l < v.length; l++) v[l]! -= projection * q[i]![l]!;
      }
    const rest = Math.sqrt(dot(v, v));
    if (!(rest > DEPENDENT * norm)) {
      dependent.push(j);
      q.push(new Float64Array(v.length));
      return;
    }
    r[j * count + j] = rest;
    for (let l = 0; l < v.length; l++) v[l]! /= rest;
    q.push(v);
  });
  return { q, r, dependent };
}
