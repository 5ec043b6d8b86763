import { describe, expect, test } from 'vitest';
import { DARK, DRAWN_ON_GROUND, LIGHT, TEXT_ON_GROUND, type ColourName } from '../../src/report/palette.ts';

// WCAG 2.2: relative luminance, contrast ratio; 4.5 for text (1.4.3), 3 for graphical objects (1.4.11).
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((i) => {
    const v = parseInt(hex.slice(i, i + 2), 16) / 255;
    return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r! + 0.7152 * g! + 0.0722 * b!;
}

function contrast(a: string, b: string): number {
  const [dark, light] = [luminance(a), luminance(b)].sort((x, y) => x - y);
  return (light! + 0.05) / (dark! + 0.05);
}

// The two ends of the scale, and the grey that WCAG's own examples give as just enough on white.
test('the formula: black on white 21, #767676 on white 4.54', () => {
  expect(contrast('#000000', '#ffffff')).toBe(21);
  expect(contrast('#767676', '#ffffff')).toBeCloseTo(4.54, 2);
});

describe.each([
  ['light', LIGHT as Readonly<Record<ColourName, string>>],
  ['dark', DARK],
])('%s', (_, colours) => {
  test.each(TEXT_ON_GROUND)('text %s on %s has a contrast of 4.5 or more', (text, ground) => {
    expect(contrast(colours[text], colours[ground])).toBeGreaterThanOrEqual(4.5);
  });

  test.each(DRAWN_ON_GROUND)('%s drawn on %s has a contrast of 3 or more', (drawn, ground) => {
    expect(contrast(colours[drawn], colours[ground])).toBeGreaterThanOrEqual(3);
  });
});
