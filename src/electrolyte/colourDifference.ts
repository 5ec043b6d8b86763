// What        How different two colours look.
// Equation    CIEDE2000 with kL = kC = kH = 1.
// Why so      The plain distance in Lab overstates differences of strong colours by a factor of two and more.
// Valid for   small and medium differences between surfaces or solutions seen side by side; about 1 is just visible.
// Units       dimensionless.
// Source      CIE 142-2001; Sharma, Wu, Dalal, Color Res. Appl. 2005, 30, 21, doi 10.1002/col.20070.
import type { Triple } from './colour.ts';

const radians = (degrees: number): number => (degrees * Math.PI) / 180;
const degrees = (angle: number): number => (angle * 180) / Math.PI;

/** CIEDE2000 of two CIE Lab colours. */
export function colourDifference([L1, a1, b1]: Triple, [L2, a2, b2]: Triple): number {
  const meanChroma7 = ((Math.hypot(a1, b1) + Math.hypot(a2, b2)) / 2) ** 7;
  const G = 0.5 * (1 - Math.sqrt(meanChroma7 / (meanChroma7 + 25 ** 7)));
  const [first, second] = [polar((1 + G) * a1, b1), polar((1 + G) * a2, b2)];
  const product = first.chroma * second.chroma;

  const deltaL = L2 - L1;
  const deltaC = second.chroma - first.chroma;
  const turn = product === 0 ? 0 : shortestTurn(second.hue - first.hue);
  const deltaH = 2 * Math.sqrt(product) * Math.sin(radians(turn / 2));

  const L = (L1 + L2) / 2;
  const C = (first.chroma + second.chroma) / 2;
  const h = product === 0 ? first.hue + second.hue : meanHue(first.hue, second.hue);

  const T =
    1 -
    0.17 * Math.cos(radians(h - 30)) +
    0.24 * Math.cos(radians(2 * h)) +
    0.32 * Math.cos(radians(3 * h + 6)) -
    0.2 * Math.cos(radians(4 * h - 63));
  const rotation = 30 * Math.exp(-(((h - 275) / 25) ** 2));
  const RC = 2 * Math.sqrt(C ** 7 / (C ** 7 + 25 ** 7));
  const SL = 1 + (0.015 * (L - 50) ** 2) / Math.sqrt(20 + (L - 50) ** 2);
  const SC = 1 + 0.045 * C;
  const SH = 1 + 0.015 * C * T;
  const RT = -Math.sin(radians(2 * rotation)) * RC;
  const [l, c, H] = [deltaL / SL, deltaC / SC, deltaH / SH];
  return Math.sqrt(l * l + c * c + H * H + RT * c * H);
}

function polar(a: number, b: number): { chroma: number; hue: number } {
  const chroma = Math.hypot(a, b);
  return { chroma, hue: chroma === 0 ? 0 : (degrees(Math.atan2(b, a)) + 360) % 360 };
}

function shortestTurn(turn: number): number {
  if (turn > 180) return turn - 360;
  return turn < -180 ? turn + 360 : turn;
}

function meanHue(first: number, second: number): number {
  const sum = first + second;
  if (Math.abs(first - second) <= 180) return sum / 2;
  return sum < 360 ? (sum + 360) / 2 : (sum - 360) / 2;
}
