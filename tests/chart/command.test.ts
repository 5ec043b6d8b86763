import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { chartPicture, chartText, checkStandardChart, readCheckLog } from '../../src/index.ts';
import { processorSeconds } from '../support/processorTime.ts';
import { normalDeviates } from '../instrument/simulated.ts';
import { folderWith, tankhue } from '../support/command.ts';

const day = (i: number) => new Date(Date.UTC(2026, 0, 1 + i)).toISOString().slice(0, 10);
const draw = normalDeviates(21);
const line = (i: number, shift: number, offset: number) =>
  `${day(i)},${i === 33 ? '' : (0.5 + 0.004 * draw() + shift).toFixed(5)},A,${(0.001 * draw() + offset).toFixed(5)}`;
const header = 'taken_at,state_of_charge,lot,mode_offset';

const files = folderWith({
  'steady.csv': [header, ...Array.from({ length: 40 }, (_, i) => line(i, 0, 0)), ''].join('\n'),
  'shifted.csv': [
    header,
    ...Array.from({ length: 60 }, (_, i) => line(i, i < 45 ? 0 : 0.012, i < 45 ? 0 : 0.006)),
    '',
  ].join('\n'),
  'long.csv': [header, ...Array.from({ length: 10_000 }, (_, i) => line(i, 0, 0)), ''].join('\n'),
  'wrong.csv': `${header}\n03/04/2026,0.5,A,0\n2026-01-02,half,A,0\n`,
});

test('a shifted standard: past action, status 4, dated, with the mode that moved', () => {
  const { status, stdout } = tankhue('check', files('shifted.csv'), '--value', 'state_of_charge');
  expect(status).toBe(4);
  expect(stdout).toMatch(/PAST-ACTION/);
  expect(stdout).toMatch(/too high, since about 2026-02-1\d/);
  expect(stdout).toMatch(/do\s+offset moved with it/);
  expect(stdout).toMatch(/missing\s+1, left open: 2026-02-03/);
});

test('JSON carries the run lengths of the limits in use', () => {
  const { status, stdout } = tankhue(
    'check',
    files('steady.csv'),
    '--value',
    'state_of_charge',
    '--format',
    'json',
    '--sum-limit',
    '4',
  );
  expect(status).not.toBe(3);
  const chart = JSON.parse(stdout);
  expect(chart.schema).toBe('tankhue/chart/1');
  // Hawkins 1993: slack 0.5, limit 4: 168 points.
  expect(chart.averageRunLength.cumulativeSum[0]).toBeCloseTo(167.684, 2);
  expect(chart.points[33]).toMatchObject({ value: null, deviation: null });
});

test('10,000 points: read, charted, drawn and written in less than a second', () => {
  const bytes = readFileSync(files('long.csv'));
  const seconds = processorSeconds(() => {
    const chart = checkStandardChart(readCheckLog(bytes, 'long.csv', '', 'state_of_charge', ''));
    return [JSON.stringify(chart), chartText(chart), chartPicture(chart)];
  });
  expect(seconds).toBeLessThan(1);
});

test('unreadable logs: every problem, status 3', () => {
  const { status, stderr } = tankhue('check', files('wrong.csv'), '--value', 'state_of_charge');
  expect(status).toBe(3);
  expect(stderr).toContain('wrong.csv:2:1');
  expect(stderr).toContain('wrong.csv:3:2');
});

test.each([[['--weight', '1.5']], [['--weight', 'x']], [['--baseline', '2']], [['--format', 'html5']]])(
  'wrong usage %j is status 2',
  (options) => {
    expect(tankhue('check', files('steady.csv'), '--value', 'state_of_charge', ...options).status).toBe(2);
  },
);
