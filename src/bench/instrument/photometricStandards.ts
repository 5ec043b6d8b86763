// Published values that instrument tests compare with. Every list names its source; what is from memory says so, and no
// certificate should rest on it.

/** A limit or nominal value at one wavelength. */
export interface DichromateLimit {
  readonly nm: number;
  readonly low: number;
  readonly high: number;
}

/**
 * A(1 %, 1 cm) of potassium dichromate, 57.0 to 63.0 mg in 1000 mL of 0.005 mol/L sulfuric acid.
 * Source: Indian Pharmacopoeia 1996, the same limits in the British and European Pharmacopoeia 2.2.25, editions around 2000.
 */
export const DICHROMATE_IN_SULFURIC_ACID: readonly DichromateLimit[] = [
  { nm: 235, low: 122.9, high: 126.2 },
  { nm: 257, low: 142.8, high: 146.2 },
  { nm: 313, low: 47.0, high: 50.3 },
  { nm: 350, low: 105.6, high: 109.0 },
];

/** mg/L the sulfuric acid limits hold for. */
export const SULFURIC_ACID_RANGE = [57, 63] as const;

/** The 430 nm limits of later pharmacopoeia editions, 600 mg/L in the same acid; from memory. */
export const DICHROMATE_430_NM: DichromateLimit = { nm: 430, low: 15.7, high: 16.1 };
export const DICHROMATE_430_RANGE = [570, 630] as const;

/**
 * Nominal absorbance at 1 cm of potassium dichromate in 0.001 mol/L perchloric acid, sealed reference solutions made from
 * SRM 935a. Absorbance per concentration rises slightly, because hydrogenchromate dimerises: interpolate, do not scale.
 * Source: R. W. Burke, R. Mavrodineanu, J. Res. Natl. Bur. Stand. 1976, 80A, 631, and a maker's public table of nominal values.
 */
export const DICHROMATE_IN_PERCHLORIC_ACID = {
  /** mg/L */
  concentration: [20, 40, 60, 80, 100],
  absorbance: [
    { nm: 235, values: [0.246, 0.493, 0.743, 0.994, 1.247] },
    { nm: 257, values: [0.286, 0.574, 0.865, 1.157, 1.452] },
    { nm: 313, values: [0.096, 0.193, 0.29, 0.387, 0.484] },
    { nm: 350, values: [0.214, 0.428, 0.643, 0.858, 1.074] },
  ],
} as const;

/**
 * Relative 95 % uncertainty of the perchloric acid absorptivities: 0.7 % at A = 0.1, 0.2 % near A = 1 (same source), in between
 * on a line in log A (ours).
 */
export function perchloricUncertainty(absorbance: number): number {
  const position = Math.min(1, Math.max(0, Math.log10(absorbance) + 1));
  return 0.007 + (0.002 - 0.007) * position;
}

/**
 * Minima of transmittance (maxima of absorbance) of 40 g/L holmium oxide in 10 % perchloric acid, 1 nm bandwidth, nm.
 * J. C. Travis et al., J. Phys. Chem. Ref. Data 2005, 34, 41; SRM 2034. From memory, unconfirmed.
 */
export const HOLMIUM_BANDS = [
  241.12, 249.89, 278.14, 287.22, 333.48, 345.38, 361.26, 385.62, 416.25, 451.43, 467.82, 485.23, 536.56, 640.5,
] as const;

/**
 * Standard uncertainty of the list as a whole, nm: ±0.1 nm stated by V. R. Weidner et al., J. Res. Natl. Bur. Stand. 1985, 90, 115,
 * taken as limits of a rectangle.
 */
export const HOLMIUM_LIST_UNCERTAINTY = 0.1 / Math.sqrt(3);
/** Standard uncertainty of one band, nm: positions move by up to 0.1 nm between bandwidths of 0.1 and 3 nm (from memory), a rectangle. */
export const HOLMIUM_BANDWIDTH_UNCERTAINTY = 0.1 / Math.sqrt(3);

/** Permitted departure, nm: European Pharmacopoeia 2.2.25, ±1 in the ultraviolet, ±3 in the visible (from 400 nm). */
export const permittedWavelengthError = (nm: number): number => (nm < 400 ? 1 : 3);

/** Cut-off solutions: where they must be dark, and how dark, at 1 cm. */
export interface CutOffSolution {
  readonly name: string;
  readonly from: number;
  readonly to: number;
  /** least absorbance */
  readonly least: number;
  readonly source: string;
}

export const CUT_OFF_SOLUTIONS: Readonly<Record<string, CutOffSolution>> = {
  'potassium-chloride': {
    name: '12 g/L potassium chloride, 1 cm',
    from: 198,
    to: 202,
    least: 2,
    source: 'pharmacopoeia: absorbance greater than 2.0 at 200 nm',
  },
  'sodium-nitrite': {
    name: '50 g/L sodium nitrite, 1 cm',
    from: 340,
    to: 370,
    least: 3,
    source: 'from memory: absorbance greater than 2 to 3 by procedure',
  },
};

/** 0.02 % toluene in hexane: least ratio of the maximum near 269 nm to the minimum near 266 nm (pharmacopoeia). */
export const TOLUENE_RATIO = 1.5;
