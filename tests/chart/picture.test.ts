import { expect, test } from 'vitest';
import { benchReport, chartPicture, checkStandardChart, type CheckLog } from '../../src/index.ts';

const log = (values: readonly number[]): CheckLog => ({
  quantity: 'state of charge',
  unit: '%',
  points: values.map((value, i) => ({
    at: `day ${i + 1}`,
    hours: 24 * i,
    lot: i < 25 ? 'A' : '<B>',
    value,
    assigned: 50,
    inBaseline: null,
    modes: {},
  })),
  modeNames: [],
  wasReordered: false,
  origin: { file: 'log.csv', column: '', sha256: '' },
});
const pattern = [0.3, -0.5, 0.7, -0.2, -0.6, 0.4, -0.1, 0.5, -0.7, 0.2];
const values = Array.from({ length: 30 }, (_, i) => 50 + pattern[i % 10]!);

const curves = (svg: string) =>
  [...svg.matchAll(/<path d="(M[^"]+)" fill="none" stroke="#2f5d7c"/g)].map(([, d]) => d!);

test('a missing day breaks the lines', () => {
  const whole = curves(chartPicture(checkStandardChart(log(values))).svg);
  const broken = curves(chartPicture(checkStandardChart(log(values.map((v, i) => (i === 12 ? NaN : v))))).svg);
  expect(whole.map((d) => d.match(/M/g)!.length)).toEqual([1, 1, 1, 1]);
  expect(broken.map((d) => d.match(/M/g)!.length)).toEqual([2, 2, 2, 2]);
});

test('every signal has its triangle, every new lot its line, and names are escaped', () => {
  const chart = checkStandardChart(log(values.map((v, i) => (i === 28 ? 54 : v))));
  const { svg } = chartPicture(chart);
  const signals = chart.points.flatMap((point) => point.signals);
  const triangles = svg.match(/l4\.5 8h-9z/g)?.length ?? 0;
  expect(triangles).toBeGreaterThan(0);
  expect(triangles).toBeLessThanOrEqual(signals.length);
  expect(svg).toContain('lot &#60;B&#62;');
  expect(svg).not.toContain('<B>');
});

test('a report is one file that fetches nothing', () => {
  const html = benchReport('a & b', '<text>', [chartPicture(checkStandardChart(log(values)))]);
  expect(html).toContain('<title>a &#38; b</title>');
  expect(html).toContain('<pre>&#60;text&#62;</pre>');
  expect(html.replaceAll('http://www.w3.org/2000/svg', '')).not.toMatch(/https?:|<script|<link|src=/);
});
