// What        The colour of light that has passed through a solution, as a person sees it and as a screen can show it.
// Equation    X = k Σ S x̄ 10^(−A), Y and Z likewise, k = 100 / Σ S ȳ; CIE Lab against the white of the same table;
//             linear sRGB = M · XYZ, then the sRGB transfer curve.
// Why so      A colour outside the screen's range is brought in by scaling its chroma with hue and lightness kept: clipping each channel turns
//             a dark violet blue.
// Valid for   clear solutions before a white lamp in daylight (D65), one path. Scattering and the wall of the vial are not in it.
// Units       A decadic absorbance; wavelength nm; XYZ 0…100; Lab dimensionless; sRGB channels 0…1.
// Source      CIE 015:2018 (tristimulus, Lab); IEC 61966-2-1:1999 (sRGB matrix and curve, from memory).
import { TankhueError } from '../errors.ts';
import { D65, OBSERVER_AXIS, xbar, ybar, zbar } from './standardObserver.ts';

export type Triple = readonly [number, number, number];

export interface SeenColour {
  readonly xyz: Triple;
  readonly lab: Triple;
  /** channels 0…1, inside the screen's range */
  readonly srgb: Triple;
  /** `#rrggbb` */
  readonly hex: string;
  /** part of the chroma that a screen can show, 0…1; 1: shown as it is */
  readonly shownChroma: number;
  /** nm at both ends that were filled with the nearest absorbance because the spectrum did not reach them */
  readonly filled: { readonly below: number | null; readonly above: number | null };
}

const OBSERVED_NM = Array.from({ length: OBSERVER_AXIS.count }, (_, i) => OBSERVER_AXIS.first + i * OBSERVER_AXIS.step);
const WHITE_SUM = D65.reduce((sum, power, i) => sum + power * ybar[i]!, 0);

/** White of the table: tristimulus values of D65 with nothing before it. */
export const WHITE: Triple = tristimulusOf(OBSERVED_NM.map(() => 1));

/**
 * @param wavelength nm, ascending, two or more
 * @param absorbance decadic, at the path that is looked through
 * @throws TankhueError `points-missing`
 */
export function colourThrough(wavelength: ArrayLike<number>, absorbance: ArrayLike<number>): SeenColour {
  if (wavelength.length < 2 || wavelength.length !== absorbance.length)
    throw new TankhueError(
      'points-missing',
      `expected two wavelengths or more and as many absorbances; received ${wavelength.length} and ${absorbance.length}`,
      'wavelength',
      'pass the whole spectrum',
    );
  const [first, last] = [wavelength[0]!, wavelength[wavelength.length - 1]!];
  const xyz = tristimulusOf(OBSERVED_NM.map((nm) => 10 ** -absorbanceAt(wavelength, absorbance, nm)));
  const lab = labOf(xyz);
  const { srgb, shownChroma } = onScreen(lab);
  return {
    xyz,
    lab,
    srgb,
    hex: hexOf(srgb),
    shownChroma,
    filled: {
      below: first > OBSERVED_NM[0]! ? first : null,
      above: last < OBSERVED_NM[OBSERVED_NM.length - 1]! ? last : null,
    },
  };
}

/** Linear between readings, the nearest reading beyond the ends. */
function absorbanceAt(wavelength: ArrayLike<number>, absorbance: ArrayLike<number>, nm: number): number {
  const last = wavelength.length - 1;
  if (nm <= wavelength[0]!) return absorbance[0]!;
  if (nm >= wavelength[last]!) return absorbance[last]!;
  let i = 1;
  while (wavelength[i]! < nm) i += 1;
  const share = (nm - wavelength[i - 1]!) / (wavelength[i]! - wavelength[i - 1]!);
  return absorbance[i - 1]! + share * (absorbance[i]! - absorbance[i - 1]!);
}

/** @param transmittance 0…1 at 380, 385, … 780 nm */
export function tristimulusOf(transmittance: readonly number[]): Triple {
  const sum = (matching: readonly number[]): number =>
    (100 * transmittance.reduce((total, part, i) => total + part * D65[i]! * matching[i]!, 0)) / WHITE_SUM;
  return [sum(xbar), sum(ybar), sum(zbar)];
}

const CUBE_ROOT_FROM = (6 / 29) ** 3;
const labCurve = (t: number): number => (t > CUBE_ROOT_FROM ? Math.cbrt(t) : t / (3 * (6 / 29) ** 2) + 4 / 29);
const labCurveInverse = (f: number): number => (f > 6 / 29 ? f ** 3 : 3 * (6 / 29) ** 2 * (f - 4 / 29));

/** CIE Lab against D65 white. */
export function labOf([X, Y, Z]: Triple): Triple {
  const [x, y, z] = [labCurve(X / WHITE[0]), labCurve(Y / WHITE[1]), labCurve(Z / WHITE[2])];
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

export function xyzOf([L, a, b]: Triple): Triple {
  const y = (L + 16) / 116;
  return [
    WHITE[0] * labCurveInverse(y + a / 500),
    WHITE[1] * labCurveInverse(y),
    WHITE[2] * labCurveInverse(y - b / 200),
  ];
}

/** Hue angle in degrees, 0…360: red 0-40, yellow about 90, green about 140-180, blue about 250-290, violet about 300. */
export const hueOf = ([, a, b]: Triple): number => ((Math.atan2(b, a) * 180) / Math.PI + 360) % 360;
export const chromaOf = ([, a, b]: Triple): number => Math.hypot(a, b);

const TO_LINEAR_SRGB: readonly Triple[] = [
  [3.2406, -1.5372, -0.4986],
  [-0.9689, 1.8758, 0.0415],
  [0.0557, -0.204, 1.057],
];
const transfer = (v: number): number => (v <= 0.0031308 ? 12.92 * v : 1.055 * v ** (1 / 2.4) - 0.055);

const linearSrgb = (xyz: Triple): Triple =>
  TO_LINEAR_SRGB.map((row) => row.reduce((sum, weight, i) => sum + (weight * xyz[i]!) / 100, 0)) as unknown as Triple;

/** The matrix is rounded to four places, so white itself overshoots by 1e-4. Below 0 there is no slack: it would turn the hue of dark colours. */
const OVERSHOOT = 5e-4;
const isShowable = (rgb: Triple): boolean => rgb.every((v) => v >= 0 && v <= 1 + OVERSHOOT);

/** sRGB channels 0…1 of a colour that a screen can show; chroma is scaled until it can. */
export function onScreen(lab: Triple): { srgb: Triple; shownChroma: number } {
  const at = (share: number): Triple => linearSrgb(xyzOf([lab[0], share * lab[1], share * lab[2]]));
  let shown = 1;
  if (!isShowable(at(1))) {
    let [low, high] = [0, 1];
    for (let i = 0; i < 40; i++) {
      shown = (low + high) / 2;
      if (isShowable(at(shown))) low = shown;
      else high = shown;
    }
    shown = low;
  }
  const srgb = at(shown).map((v) => transfer(Math.min(1, Math.max(0, v)))) as unknown as Triple;
  return { srgb, shownChroma: shown };
}

export const hexOf = (srgb: Triple): string =>
  `#${srgb
    .map((v) =>
      Math.round(255 * v)
        .toString(16)
        .padStart(2, '0'),
    )
    .join('')}`;
