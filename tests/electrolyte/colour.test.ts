import { existsSync, readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  chromaOf,
  colourThrough,
  hueOf,
  labOf,
  onScreen,
  tristimulusOf,
  WHITE,
  xyzOf,
  type Triple,
} from '../../src/electrolyte/colour.ts';
import { parseCalibration, seededRandom, simulateSpectrum } from '../../src/index.ts';
import { colourDifference } from '../../src/electrolyte/colourDifference.ts';
import { D65, OBSERVER_AXIS, xbar, ybar, zbar } from '../../src/electrolyte/standardObserver.ts';

const sum = (values: readonly number[]): number => values.reduce((total, value) => total + value, 0);
const axis = Array.from({ length: 41 }, (_, i) => 380 + 10 * i);

describe('observer and daylight', () => {
  // CIE 018:2019, 1931 observer and D65 at 5 nm; sums computed from the same published table.
  test('the tables are those of the CIE', () => {
    expect([xbar, ybar, zbar, D65].map((table) => table.length)).toEqual([81, 81, 81, 81]);
    expect(sum(xbar)).toBeCloseTo(21.371524, 6);
    expect(sum(ybar)).toBeCloseTo(21.371327, 6);
    expect(sum(zbar)).toBeCloseTo(21.37154, 6);
    expect(D65[(560 - OBSERVER_AXIS.first) / OBSERVER_AXIS.step]).toBe(100);
  });

  // ASTM E308 / IEC 61966-2-1: 95.047, 100, 108.883 (rounded from 1 nm); the 5 nm sum is 95.043, 108.880.
  test('white is D65', () => {
    expect(WHITE[0]).toBeCloseTo(95.0429662, 6);
    expect(WHITE[1]).toBe(100);
    expect(WHITE[2]).toBeCloseTo(108.8800568, 6);
    expect(Math.abs(WHITE[0] - 95.047)).toBeLessThan(0.005);
    expect(WHITE[0] / sum(WHITE)).toBeCloseTo(0.31272, 5);
    expect(WHITE[1] / sum(WHITE)).toBeCloseTo(0.32903, 5);
  });

  test.skipIf(!existsSync('../shared/references/cie1931_d65_5nm.json'))(
    'every figure agrees with the reference file',
    () => {
      const reference = JSON.parse(readFileSync('../shared/references/cie1931_d65_5nm.json', 'utf8'));
      expect({ xbar, ybar, zbar, d65: D65 }).toEqual({
        xbar: reference.xbar,
        ybar: reference.ybar,
        zbar: reference.zbar,
        d65: reference.d65,
      });
    },
  );
});

describe('colour through a solution', () => {
  test('water is white: sRGB #ffffff', () => {
    const seen = colourThrough(
      axis,
      axis.map(() => 0),
    );
    expect(seen.hex).toBe('#ffffff');
    expect(seen.shownChroma).toBe(1);
    expect(seen.lab[0]).toBeCloseTo(100, 9);
    expect(chromaOf(seen.lab)).toBeLessThan(1e-9);
  });

  test('a grey filter of absorbance 1 passes a tenth: L* = 37.84', () => {
    const seen = colourThrough(
      axis,
      axis.map(() => 1),
    );
    expect(seen.xyz[1]).toBeCloseTo(10, 9);
    expect(seen.lab[0]).toBeCloseTo(116 * Math.cbrt(0.1) - 16, 9);
    expect(chromaOf(seen.lab)).toBeLessThan(1e-9);
  });

  test('what the spectrum does not reach is filled with the nearest reading, and said', () => {
    const seen = colourThrough([430, 700], [0.5, 0.5]);
    expect(seen.filled).toEqual({ below: 430, above: 700 });
    expect(seen.xyz[1]).toBeCloseTo(100 * 10 ** -0.5, 9);
    expect(colourThrough([380, 780], [0, 0]).filled).toEqual({ below: null, above: null });
  });

  test.each([
    [[400], [0]],
    [[400, 500], [0]],
  ])('a spectrum of %j nm and %j is refused', (wavelength, absorbance) => {
    expect(() => colourThrough(wavelength, absorbance)).toThrow(
      expect.objectContaining({ code: 'points-missing', where: 'wavelength' }),
    );
  });

  const lab = fc.tuple(
    fc.double({ min: 1, max: 99, noNaN: true }),
    fc.double({ min: -120, max: 120, noNaN: true }),
    fc.double({ min: -120, max: 120, noNaN: true }),
  );

  test('Lab and XYZ undo each other', () => {
    fc.assert(
      fc.property(lab, (colour) => {
        labOf(xyzOf(colour)).forEach((value, i) => expect(value).toBeCloseTo(colour[i]!, 8));
      }),
    );
  });

  test('a colour the screen cannot show keeps hue and lightness', () => {
    fc.assert(
      fc.property(lab, (colour) => {
        const { srgb, shownChroma } = onScreen(colour);
        for (const channel of srgb) expect(channel >= 0 && channel <= 1).toBe(true);
        const shown = labOf(xyzFromSrgb(srgb));
        // Four-digit matrices of the standard are inverse to each other within 0.1 of L*.
        expect(Math.abs(shown[0] - colour[0])).toBeLessThan(0.3);
        if (shownChroma * chromaOf(colour) > 5) {
          const turn = Math.abs(hueOf(shown) - hueOf(colour));
          expect(Math.min(turn, 360 - turn)).toBeLessThan(2.5);
        }
      }),
    );
  });

  test('a darker solution is darker', () => {
    const lightness = [0.2, 0.5, 1, 2].map((A) => labOf(tristimulusOf(Array<number>(81).fill(10 ** -A)))[0]);
    expect([...lightness].sort((a, b) => b - a)).toEqual(lightness);
  });
});

/** Other way round than the code: the inverse matrix of IEC 61966-2-1 (from memory). */
function xyzFromSrgb(srgb: Triple): Triple {
  const [r, g, b] = srgb.map((v) => (v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4)) as unknown as Triple;
  return [
    100 * (0.4124 * r + 0.3576 * g + 0.1805 * b),
    100 * (0.2126 * r + 0.7152 * g + 0.0722 * b),
    100 * (0.0193 * r + 0.1192 * g + 0.9505 * b),
  ];
}

describe('colours of the bench', () => {
  const reference = parseCalibration(readFileSync('calibration/reference.json', 'utf8'));
  const through = (concentration: Readonly<Record<string, number>>, pathLength: number) => {
    const { wavelength, absorbance } = simulateSpectrum(
      reference,
      { name: 'vial', concentration, pathLength },
      seededRandom(1),
    );
    return colourThrough(wavelength, absorbance);
  };

  // Common practice, no source: V(II) is violet, V(III) green, V(IV) blue, V(V) yellow. Hue angles of CIE Lab: yellow about 90,
  // green 130-190 (towards blue in this ion), blue 215-290, violet 295-320. At 1 cm, as in a vial; tank electrolyte is nearly black there.
  test.each([
    ['V(II)', { V2: 0.1 }, [290, 320]],
    ['V(II)', { V2: 0.4 }, [290, 320]],
    ['V(III)', { V3: 0.1 }, [130, 190]],
    ['V(III)', { V3: 0.4 }, [130, 190]],
    ['V(IV)', { V4: 0.1 }, [210, 290]],
    ['V(IV)', { V4: 0.8 }, [210, 290]],
    ['V(V)', { V5: 0.1 }, [75, 110]],
    ['V(V)', { V5: 0.4 }, [65, 110]],
  ] as const)('%s, %j mol/L, has its hue at 1 cm', (_, concentration, [from, to]) => {
    const { lab } = through(concentration, 1);
    expect(chromaOf(lab)).toBeGreaterThan(20);
    expect(hueOf(lab)).toBeGreaterThan(from);
    expect(hueOf(lab)).toBeLessThan(to);
  });

  // Common practice, no source: a mixture of V(IV) and V(V) is dark green, darker than either part alone. With this calibration it is green
  // to blue green; from 0.15 mol/L each on it is so dark at 1 cm (L* 2) that no hue is seen.
  test.each([[0.08], [0.1]])(
    'V(IV) and V(V), %d mol/L each, are darker than both parts, green to blue green',
    (each) => {
      const mixture = through({ V4: each, V5: each }, 1).lab;
      expect(mixture[0]).toBeLessThan(through({ V4: each }, 1).lab[0] - 25);
      expect(mixture[0]).toBeLessThan(through({ V5: each }, 1).lab[0] - 25);
      expect(hueOf(mixture)).toBeGreaterThan(110);
      expect(hueOf(mixture)).toBeLessThan(215);
    },
  );
});

describe('colour difference', () => {
  // Sharma, Wu, Dalal, Color Res. Appl. 2005, 30, 21-30, table 1: L1 a1 b1 L2 a2 b2 ΔE00, four decimals.
  const PAIRS = [
    [50, 2.6772, -79.7751, 50, 0, -82.7485, 2.0425],
    [50, 3.1571, -77.2803, 50, 0, -82.7485, 2.8615],
    [50, 2.8361, -74.02, 50, 0, -82.7485, 3.4412],
    [50, -1.3802, -84.2814, 50, 0, -82.7485, 1],
    [50, -1.1848, -84.8006, 50, 0, -82.7485, 1],
    [50, -0.9009, -85.5211, 50, 0, -82.7485, 1],
    [50, 0, 0, 50, -1, 2, 2.3669],
    [50, -1, 2, 50, 0, 0, 2.3669],
    [50, 2.49, -0.001, 50, -2.49, 0.0009, 7.1792],
    [50, 2.49, -0.001, 50, -2.49, 0.001, 7.1792],
    [50, 2.49, -0.001, 50, -2.49, 0.0011, 7.2195],
    [50, 2.49, -0.001, 50, -2.49, 0.0012, 7.2195],
    [50, -0.001, 2.49, 50, 0.0009, -2.49, 4.8045],
    [50, -0.001, 2.49, 50, 0.001, -2.49, 4.8045],
    [50, -0.001, 2.49, 50, 0.0011, -2.49, 4.7461],
    [50, 2.5, 0, 50, 0, -2.5, 4.3065],
    [50, 2.5, 0, 73, 25, -18, 27.1492],
    [50, 2.5, 0, 61, -5, 29, 22.8977],
    [50, 2.5, 0, 56, -27, -3, 31.903],
    [50, 2.5, 0, 58, 24, 15, 19.4535],
    [50, 2.5, 0, 50, 3.1736, 0.5854, 1],
    [50, 2.5, 0, 50, 3.2972, 0, 1],
    [50, 2.5, 0, 50, 1.8634, 0.5757, 1],
    [50, 2.5, 0, 50, 3.2592, 0.335, 1],
    [60.2574, -34.0099, 36.2677, 60.4626, -34.1751, 39.4387, 1.2644],
    [63.0109, -31.0961, -5.8663, 62.8187, -29.7946, -4.0864, 1.263],
    [61.2901, 3.7196, -5.3901, 61.4292, 2.248, -4.962, 1.8731],
    [35.0831, -44.1164, 3.7933, 35.0232, -40.0716, 1.5901, 1.8645],
    [22.7233, 20.0904, -46.694, 23.0331, 14.973, -42.5619, 2.0373],
    [36.4612, 47.858, 18.3852, 36.2715, 50.5065, 21.2231, 1.4146],
    [90.8027, -2.0831, 1.441, 91.1528, -1.6435, 0.0447, 1.4441],
    [90.9257, -0.5406, -0.9208, 88.6381, -0.8985, -0.7239, 1.5381],
    [6.7747, -0.2908, -2.4247, 5.8714, -0.0985, -2.2286, 0.6377],
    [2.0776, 0.0795, -1.135, 0.9033, -0.0636, -0.5514, 0.9082],
  ] as const;

  test.each(PAIRS)('%d %d %d and %d %d %d differ by %d', (L1, a1, b1, L2, a2, b2, expected) => {
    expect(Math.abs(colourDifference([L1, a1, b1], [L2, a2, b2]) - expected)).toBeLessThan(0.5001e-4);
    expect(Math.abs(colourDifference([L2, a2, b2], [L1, a1, b1]) - expected)).toBeLessThan(0.5001e-4);
  });

  test('all 34 pairs are here', () => expect(PAIRS).toHaveLength(34));
});
