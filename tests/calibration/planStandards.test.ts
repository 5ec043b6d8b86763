import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { parseCalibration } from '../../src/calibration/file.ts';
import { planStandards } from '../../src/calibration/planStandards.ts';

const { pairs } = parseCalibration(readFileSync('calibration/reference.json', 'utf8'));
const request = { count: 6, totals: [0.9, 1.3, 1.8], pathLength: 0.01 };

describe('planStandards', () => {
  test.each(pairs.map((pair) => [pair.pair, pair] as const))(
    '%s: never worse than an even grid, and each standard helps',
    (_, pair) => {
      const plan = planStandards(pair, { ...request, pathLength: pair.domain.path[1] });
      expect(plan.standards).toHaveLength(6);
      expect(plan.leverageAfter).toBeLessThanOrEqual(plan.leverageOfEvenGrid * (1 + 1e-9));
      let before = plan.leverageBefore;
      for (const { leverageAfter } of plan.standards) {
        expect(leverageAfter).toBeLessThan(before);
        before = leverageAfter;
      }
    },
  );

  test('a straight line wants its ends: a Beer-Lambert pair gets nearly pure standards', () => {
    // Textbook result: for two linear terms the optimum puts all weight on the extremes.
    const [pair] = pairs;
    const { standards } = planStandards(pair!, { ...request, count: 4, totals: [1.8] });
    expect(standards.every(({ share }) => share <= 0.15 || share >= 0.85)).toBe(true);
  });

  test('none to make is refused', () => {
    expect(() => planStandards(pairs[0]!, { ...request, count: 0 })).toThrow(
      expect.objectContaining({ code: 'out-of-range' }),
    );
  });
});
