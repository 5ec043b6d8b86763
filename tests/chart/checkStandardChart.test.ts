import { expect, test } from 'vitest';
import { checkStandardChart } from '../../src/bench/chart/checkStandardChart.ts';
import type { CheckLog, CheckPoint } from '../../src/bench/chart/checkLog.ts';
import { normalDeviates } from '../instrument/simulated.ts';

const day = (i: number) => new Date(Date.UTC(2026, 0, 1 + i)).toISOString().slice(0, 10);

/** A log of one value a day; `change` may move value, lot or modes. */
function log(
  count: number,
  change: (i: number, draw: () => number) => Partial<CheckPoint> = () => ({}),
  seed = 1,
): CheckLog {
  const draw = normalDeviates(seed);
  const points = Array.from({ length: count }, (_, i): CheckPoint => {
    const value = 50 + 0.5 * draw();
    const modes = { offset: 0.002 * draw(), path: 0.01 * draw() };
    const changed = change(i, draw);
    return {
      at: day(i),
      hours: 24 * i,
      lot: 'A',
      assigned: NaN,
      inBaseline: null,
      value,
      modes,
      ...changed,
    };
  });
  return {
    quantity: 'state of charge',
    unit: '%',
    points,
    modeNames: ['offset', 'path'],
    wasReordered: false,
    origin: { file: 'log.csv', column: '', sha256: '' },
  };
}

const shiftedFrom = (start: number, by: number) => {
  const steady = log(60, undefined, 3).points;
  return log(60, (i) => (i >= start ? { value: steady[i]!.value + by } : {}), 3);
};

test('a steady standard is in control, centred and scaled on its baseline', () => {
  const pattern = [0.3, -0.5, 0.7, -0.2, -0.6, 0.4, -0.1, 0.5, -0.7, 0.2];
  const chart = checkStandardChart(log(40, (i) => ({ value: 50 + pattern[i % 10]! })));
  expect(chart).toMatchObject({ state: 'in-control', alarms: [], findings: [] });
  expect(chart.baseline.points).toBe(20);
  expect(chart.baseline.centres['A']).toBeCloseTo(50, 12);
  // Σ pattern² = 2.18, twice over 19 degrees of freedom.
  expect(chart.baseline.standardDeviation).toBeCloseTo(Math.sqrt(4.36 / 19), 12);
});

test('a lasting step is dated to where it began, with its size', () => {
  const chart = checkStandardChart(shiftedFrom(40, 1.5));
  expect(chart.state).toBe('past-action');
  const alarm = chart.alarms.at(-1)!;
  expect(alarm.direction).toBe('up');
  expect(Math.abs(new Date(alarm.since).getTime() - new Date(day(40)).getTime()) / 86400000).toBeLessThanOrEqual(2);
  expect(Math.abs(alarm.shift.value - 1.5)).toBeLessThan(3 * alarm.shift.uncertainty);
  expect(alarm.signals).toContain('cumulative-sum');
});

test('a small step is dated to its beginning, though it is seen later', () => {
  const pattern = [0.3, -0.5, 0.7, -0.2, -0.6, 0.4, -0.1, 0.5, -0.7, 0.2];
  const chart = checkStandardChart(log(40, (i) => ({ value: i < 30 ? 50 + pattern[i % 10]! : 50.45 })));
  // Seen with the eighth point on one side (the last of the pattern was on it too), begun with the first of the step.
  expect(chart.alarms[0]).toMatchObject({ from: day(36), since: day(30), direction: 'up' });
});

test('the mode that moved with it is named first', () => {
  const steady = log(60, undefined, 3).points;
  const chart = checkStandardChart(
    log(
      60,
      (i) => {
        if (i < 40) return {};
        return { value: steady[i]!.value + 1.5, modes: { offset: 0.03, path: steady[i]!.modes['path']! } };
      },
      3,
    ),
  );
  expect(chart.alarms.at(-1)!.movedModes.map(({ mode }) => mode)).toEqual(['offset']);
  expect(chart.alarms.at(-1)!.suggestion).toContain('blank');
});

test('when no mode moved the standard itself is suspected', () => {
  const chart = checkStandardChart(shiftedFrom(40, 1.5));
  expect(chart.alarms.at(-1)!.movedModes).toEqual([]);
  expect(chart.alarms.at(-1)!.suggestion).toContain('check standard itself');
});

test('a new lot with an assigned value continues the chart', () => {
  const lots = log(60, (i, draw) => (i < 30 ? { assigned: 50 } : { lot: 'B', assigned: 62, value: 62 + 0.5 * draw() }));
  const chart = checkStandardChart(lots);
  expect(chart.state).toBe('in-control');
  expect(chart.baseline.centres['B']! - chart.baseline.centres['A']!).toBeCloseTo(12, 9);
});

test('a new lot whose assigned value is wrong is the suspect', () => {
  const lots = log(60, (i, draw) =>
    i < 30 ? { assigned: 50 } : { lot: 'B', assigned: 60.5, value: 62 + 0.5 * draw() },
  );
  const chart = checkStandardChart(lots);
  expect(chart.state).toBe('past-action');
  expect(chart.alarms.at(-1)!.suggestion).toContain('lot B');
});

test('a new lot without assigned value or baseline is shown, not judged', () => {
  const chart = checkStandardChart(log(40, (i) => (i < 30 ? {} : { lot: 'B', value: 80 })));
  expect(chart.points[35]!.deviation).toBeNull();
  expect(chart.points[35]!.value).toBe(80);
  expect(chart.findings.map(({ code }) => code)).toEqual(['lot-without-centre']);
});

const secondLot = (ownBaseline: number) =>
  log(70, (i, draw) => ({
    inBaseline: i < 20 || (i >= 30 && i < 30 + ownBaseline) ? true : null,
    ...(i >= 30 ? { lot: 'B', value: 80 + 0.5 * draw() } : {}),
  }));

test('a new lot with baseline lines of its own has its own centre', () => {
  const chart = checkStandardChart(secondLot(20));
  expect(chart.baseline.centres['B']).toBeCloseTo(80, 0);
  expect(chart.baseline.degreesOfFreedom).toBe(38);
  expect(chart.points[60]!.deviation).not.toBeNull();
  expect(chart.findings).toEqual([]);
});

test('a centre from few points is said to be rough', () => {
  expect(checkStandardChart(secondLot(6)).findings.map(({ code }) => code)).toEqual(['lot-centre-rough']);
});

test('a missing day stays missing', () => {
  const chart = checkStandardChart(log(40, (i) => (i === 25 ? { value: NaN } : {}), 5));
  expect(chart.missing).toEqual([day(25)]);
  expect(chart.points[25]).toMatchObject({
    value: null,
    deviation: null,
    movingAverage: null,
    sumUp: null,
    signals: [],
  });
  expect(chart.points[26]!.movingAverage).not.toBeNull();
});

test.each([
  ['baseline-short', log(12)],
  ['baseline-outlier', log(40, (i) => (i === 5 ? { value: 55 } : {}))],
  ['baseline-not-steady', log(40, (i) => (i < 20 ? { value: 50 + 0.2 * i } : {}))],
  ['baseline-biased', log(40, () => ({ assigned: 49 }))],
])('doubt about the baseline: %s', (code, each) => {
  expect(checkStandardChart(each).findings.map((finding) => finding.code)).toContain(code);
});

test.each([
  ['baseline-missing', log(2)],
  ['baseline-constant', log(30, () => ({ value: 50 }))],
])('%s is refused', (code, each) => {
  expect(() => checkStandardChart(each)).toThrow(expect.objectContaining({ code, where: 'log.csv' }));
});

// The union of rare alarms: rates add at most. 1/(1/91.75 + 1/499.735 + 1/465.444) = 66.5.
test('the false alarms of all three together are stated', () => {
  expect(checkStandardChart(log(40)).averageRunLength.falseAlarmOfAll).toBeCloseTo(66.5, 1);
});

test('false alarms come about as often as stated', () => {
  // Long baseline, so that limits are known well; 20,000 further points.
  const long = log(60_000, () => ({ modes: {} }), 11);
  const chart = checkStandardChart(long, {
    baselineCount: 40_000,
    movingAverage: { weight: 0.2, limit: 2.962 },
    cumulativeSum: { slack: 0.5, limit: 5 },
  });
  const beyond = chart.points.filter(({ signals }) => signals.includes('past-action')).length;
  // 60,000/370.4 = 162, Poisson: ±3 √162.
  expect(Math.abs(beyond - 162)).toBeLessThan(39);
});
