import { expect, test } from 'vitest';
import { dilutionsFrom, dilutionWith, ONE_MARK_FLASKS, ONE_MARK_PIPETTES } from '../../src/bench/glassware.ts';

const pipette = (volume: number) => ONE_MARK_PIPETTES.find((piece) => piece.volume === volume)!;
const flask = (volume: number) => ONE_MARK_FLASKS.find((piece) => piece.volume === volume)!;

// Class A tolerances of ISO 648 and ISO 1042 (from memory), triangular: arithmetic done apart from this code.
test.each([
  [1, 25, 0.33],
  [2, 50, 0.21],
  [5, 50, 0.13],
  [5, 100, 0.13],
])('%s mL into %s mL is known to %s %%', (from, to, percent) => {
  const step = dilutionWith(pipette(from), flask(to));
  expect(step.factor).toBe(to / from);
  expect(100 * step.uncertainty).toBeCloseTo(percent, 2);
});

test('each factor once, by the surest way, rising', () => {
  const steps = dilutionsFrom(ONE_MARK_PIPETTES, ONE_MARK_FLASKS);
  expect(steps.map(({ factor }) => factor)).toEqual([2, 2.5, 5, 10, 12.5, 20, 25, 50, 100]);
  expect(steps.find(({ factor }) => factor === 10)!.glassware).toBe('10 mL pipette, 100 mL flask');
});
