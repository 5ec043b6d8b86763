import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { appendFileSync, existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { afterAll, describe, expect, test } from 'vitest';
import { parseCalibration, prepare, seededRandom, simulateSpectrum, type SimulatedFaults } from '../../src/index.ts';
import type { SeriesRecord } from '../../src/report/seriesNdjson.ts';

// The command as a process, on series of our own making.

const folder = mkdtempSync(join(tmpdir(), 'tankhue-follow-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const reference = parseCalibration(readFileSync('calibration/reference.json', 'utf8'), 'reference.json');
const axis = Float64Array.from({ length: 66 }, (_, i) => 430 + 8 * i);
const random = seededRandom(11);

/** One line of the series: state of charge, faults, time in seconds. */
function line(
  seconds: number,
  stateOfCharge: number,
  faults: Partial<SimulatedFaults> = {},
  on: Float64Array = axis,
): string {
  const { absorbance } = simulateSpectrum(
    reference,
    {
      name: '',
      concentration: { V2: 1.6 * stateOfCharge, V3: 1.6 * (1 - stateOfCharge) },
      pathLength: 0.1,
      wavelength: on,
      noise: { constant: 0.0003 },
      faults,
    },
    random,
  );
  return `${seconds},${Array.from(absorbance, (value) => value.toFixed(5)).join(',')}\n`;
}
const head = (on: Float64Array = axis): string => `time_s,${on.join(',')}\n`;
/** State of charge that rises from 0.3 to 0.7 in a thousand rows and falls back. */
const chargeAt = (i: number): number => 0.3 + (0.4 * (i % 1000)) / 1000;
const series = (count: number, from = 0): string =>
  Array.from({ length: count }, (_, i) => line(from + i, chargeAt(from + i))).join('');

let files = 0;
function file(content: string, extension = 'csv'): string {
  const path = join(folder, `series-${(files += 1)}.${extension}`);
  writeFileSync(path, content);
  return path;
}

const base = ['dist/cli/main.js', 'follow'];
const cell = ['--side', 'negative', '--path', '1mm'];
const follow = (path: string, ...more: string[]) =>
  spawnSync(process.execPath, [...base, path, ...cell, ...more], { encoding: 'utf8', maxBuffer: 1 << 28 });
const records = (text: string): SeriesRecord[] =>
  text
    .split('\n')
    .filter((one) => one !== '')
    .map((one) => JSON.parse(one) as SeriesRecord);
const codes = (record: SeriesRecord): string[] =>
  record.findings.map((one) => one.code).filter((code) => code !== 'reference-calibration');

/** Rows 1…count, each once, each beginning where the one before ends. */
function expectWhole(found: readonly SeriesRecord[], count: number): void {
  expect(found.map((record) => record.row)).toEqual(Array.from({ length: count }, (_, i) => i + 1));
  found.slice(1).forEach((record, i) => {
    if (record.axisAt === found[i]!.axisAt) expect(record.byte[0]).toBe(found[i]!.byte[1]);
  });
}

test('every row once, in order, with the numbers of the library; the same for any number of threads', () => {
  const text = series(700);
  const path = file(head() + text);
  const one = follow(path, '--jobs', '1');
  expect(one.status).toBe(0);
  const found = records(one.stdout);
  expectWhole(found, 700);
  expect(found.map((record) => record.label['time_s'])).toEqual(Array.from({ length: 700 }, (_, i) => String(i)));
  const readings = text
    .split('\n')
    .slice(0, 700)
    .flatMap((row) => row.split(',').slice(1).map(Number));
  const many = prepare(reference, axis, { pair: 'V2/V3', pathLength: 0.1 }).solveMany(Float64Array.from(readings));
  found.forEach((record, i) => {
    expect(record.stateOfCharge.value).toBeCloseTo(many.stateOfCharge[i]!, 6);
    expect(record.stateOfCharge.uncertainty! / many.uncertainty[i]!).toBeCloseTo(1, 2);
    expect(record.totalVanadium.value).toBeCloseTo(many.totalVanadium[i]!, 6);
    expect(record.totalVanadium.uncertainty! / many.totalUncertainty[i]!).toBeCloseTo(1, 2);
    expect(Math.abs(record.stateOfCharge.value! - chargeAt(i))).toBeLessThan(0.02);
  });
  expect(follow(path, '--jobs', '3').stdout).toBe(one.stdout);
});

test('a file cut in mid-line: the half line waits, --resume takes it whole, nothing twice', () => {
  const text = head() + series(12);
  const cut = text.length - 100;
  const path = file(text.slice(0, cut));
  const out = join(folder, 'cut.ndjson');
  const first = follow(path, '--out', out);
  expect(first.stderr).toContain('the last line is not finished');
  expectWhole(records(readFileSync(out, 'utf8')), 11);
  appendFileSync(path, text.slice(cut) + series(5, 12));
  expect(follow(path, '--out', out, '--resume').status).toBe(0);
  const all = records(readFileSync(out, 'utf8'));
  expectWhole(all, 17);
  expect(all.map((record) => record.label['time_s'])).toEqual(Array.from({ length: 17 }, (_, i) => String(i)));
});

test('--since goes on at the byte that a run printed, with the row numbers of the file', () => {
  const path = file(head() + series(9));
  const all = records(follow(path).stdout);
  const later = records(follow(path, '--since', String(all[5]!.byte[1])).stdout);
  expect(later.map((record) => record.row)).toEqual([7, 8, 9]);
  expect(later.map((record) => record.byte)).toEqual(all.slice(6).map((record) => record.byte));
  const inside = follow(path, '--since', String(all[5]!.byte[1] + 3));
  expect(inside.status).toBe(3);
  expect(inside.stderr).toContain('not-a-line');
});

test('results that exist are not overwritten', () => {
  const out = join(folder, 'exists.ndjson');
  writeFileSync(out, 'something of mine\n');
  const path = file(head() + series(3));
  expect(follow(path, '--out', out).stderr).toContain('results-exist');
  expect(follow(path, '--out', out, '--resume').stderr).toContain('not-results');
  expect(readFileSync(out, 'utf8')).toBe('something of mine\n');
});

describe('what happens in a series', () => {
  test('a cell that fills with gas: withheld while it lasts, and the series goes on', () => {
    const gas = (t: number): string =>
      `${t},${Array.from(axis, () => (0.0004 * random.normal()).toFixed(5)).join(',')}\n`;
    const text = head() + series(150) + Array.from({ length: 600 }, (_, i) => gas(150 + i)).join('') + series(150, 750);
    const run = follow(file(text));
    const found = records(run.stdout);
    expectWhole(found, 900);
    expect(run.status).toBe(4);
    const inGas = found.slice(150, 750);
    expect(inGas.filter((record) => record.state === 'withheld')).toHaveLength(600);
    expect(inGas.filter((record) => record.stateOfCharge.value !== null)).toHaveLength(0);
    const outside = [...found.slice(0, 150), ...found.slice(750)];
    expect(outside.filter((record) => record.stateOfCharge.value === null)).toHaveLength(0);
    expect(codes(inGas[0]!)).toContain('too-faint');
    expect(run.stderr).toContain('row 151: withheld from here on');
    expect(run.stderr).toContain('row 751: results again');
  });

  test('bubbles in every other row: each is judged by itself, however many there are', () => {
    const text = Array.from({ length: 400 }, (_, i) => line(i, 0.5, i % 2 === 1 ? { bubble: 0.35 } : {})).join('');
    const found = records(follow(file(head() + text)).stdout);
    expectWhole(found, 400);
    expect(found.filter((record, i) => (record.state === 'withheld') !== (i % 2 === 1))).toEqual([]);
    for (const record of found.filter((_, i) => i % 2 === 0)) expect(record.stateOfCharge.value).toBeCloseTo(0.5, 1);
  });

  test('a lamp that is changed: the first row after it has its cause, and the step is told', () => {
    const before = Array.from({ length: 157 }, (_, i) => line(i, 0.5)).join('');
    const after = Array.from({ length: 200 }, (_, i) => line(157 + i, 0.5, { offset: 0.02, slope: 0.01 })).join('');
    const run = follow(file(head() + before + after));
    const found = records(run.stdout);
    expectWhole(found, 357);
    expect(found.slice(0, 157).flatMap(codes)).toEqual([]);
    expect(found.slice(157).filter((record) => !codes(record).includes('baseline-off'))).toEqual([]);
    const steps = found.filter((record) => codes(record).includes('series-step'));
    expect(steps).toHaveLength(1);
    expect(steps[0]!.row).toBeGreaterThan(157);
    expect(steps[0]!.row).toBeLessThan(175);
    const named = Number(/since about row (\d+)/.exec(steps[0]!.findings[0]!.message)![1]);
    expect(Math.abs(named - 158)).toBeLessThanOrEqual(6);
  });

  test('a clock that goes back is told once, results go on', () => {
    const run = follow(file(head() + series(20, 3600) + series(20, 100)));
    const found = records(run.stdout);
    expect(found.filter((record) => codes(record).includes('clock-went-back')).map((record) => record.row)).toEqual([
      21,
    ]);
    expect(found.every((record) => record.stateOfCharge.value !== null)).toBe(true);
  });

  test('rows without values, with half a line, with holes: withheld or masked, neighbours untouched', () => {
    const empty = `5,${Array.from(axis, () => 'NaN').join(',')}\n`;
    const torn = '6,0.1,0.2\n';
    const holes = line(7, 0.5).split(',');
    for (let i = 30; i < 34; i++) holes[i] = '';
    const run = follow(file(head() + series(5) + empty + torn + holes.join(',') + series(5, 8)));
    const found = records(run.stdout);
    expectWhole(found, 13);
    expect(found.map((record) => record.state === 'withheld')).toEqual(found.map((_, i) => i === 5 || i === 6));
    expect(codes(found[5]!)).toContain('too-few-wavelengths');
    expect(codes(found[6]!)).toContain('row-incomplete');
    expect(codes(found[7]!)).toContain('over-ceiling');
    expect(found[7]!.stateOfCharge.value).toBeCloseTo(0.5, 1);
  });

  test('an axis that changes in mid-file: read on with the new one, told, resumable behind it', () => {
    const finer = Float64Array.from({ length: 131 }, (_, i) => 430 + 4 * i);
    const part = (n: number, from: number, on: Float64Array) =>
      Array.from({ length: n }, (_, i) => line(from + i, 0.6, {}, on)).join('');
    const text = head() + part(40, 0, axis) + head(finer) + part(40, 40, finer) + head() + part(30, 80, axis);
    const path = file(text);
    const run = follow(path);
    const found = records(run.stdout);
    expectWhole(found, 110);
    expect(found.filter((record) => codes(record).includes('axis-changed')).map((record) => record.row)).toEqual([
      41, 81,
    ]);
    for (const record of found) expect(record.stateOfCharge.value).toBeCloseTo(0.6, 1);
    const later = records(follow(path, '--since', String(found[60]!.byte[1])).stdout);
    expect(later.map((record) => record.row)).toEqual(Array.from({ length: 49 }, (_, i) => 62 + i));
    expect(later[0]!.axisAt).toBe(found[60]!.axisAt);
    expect(later[0]!.stateOfCharge.value).toBeCloseTo(found[61]!.stateOfCharge.value!, 9);
  });
});

describe('interrupted', () => {
  const text = head() + series(1000).repeat(12);
  const path = file(text);
  const start = (out: string, ...more: string[]): ChildProcess =>
    spawn(process.execPath, [...base, path, ...cell, '--out', out, ...more], { stdio: ['ignore', 'ignore', 'pipe'] });
  const begun = async (out: string): Promise<void> => {
    while (!existsSync(out) || readFileSync(out).length < 1000) await pause(5);
  };

  test.each([
    ['SIGKILL', null],
    ['SIGINT', 130],
  ] as const)('by %s in full work: --resume goes on, no row lost, none twice', async (signal, status) => {
    const out = join(folder, `${signal}.ndjson`);
    const child = start(out, '--jobs', '2');
    const ended = once(child, 'exit');
    await begun(out);
    child.kill(signal);
    const [code] = (await ended) as [number | null];
    expect(code).toBe(status);
    const rows = readFileSync(out, 'utf8').split('\n').length - 1;
    expect(rows).toBeLessThan(12_000);
    expect(follow(path, '--out', out, '--resume').status).toBe(0);
    const all = records(readFileSync(out, 'utf8'));
    expectWhole(all, 12_000);
    expect(all[11_999]!.byte[1]).toBe(text.length);
  });

  test('waiting for a file that grows, in pieces that end in mid-line, until it is stopped', async () => {
    const growing = file(head());
    const out = join(folder, 'growing.ndjson');
    const child = spawn(process.execPath, [...base, growing, ...cell, '--out', out, '--wait', '--jobs', '1'], {
      stdio: ['ignore', 'ignore', 'pipe'],
    });
    const ended = once(child, 'exit');
    const rows = series(30);
    for (let at = 0; at < rows.length; at += 3000) {
      appendFileSync(growing, rows.slice(at, at + 3000));
      await pause(120);
    }
    const deadline = Date.now() + 20_000;
    while (Date.now() < deadline && (!existsSync(out) || readFileSync(out, 'utf8').split('\n').length <= 30))
      await pause(50);
    child.kill('SIGINT');
    const [code] = (await ended) as [number];
    expect(code).toBe(0);
    expectWhole(records(readFileSync(out, 'utf8')), 30);
  });
});

describe('NDJSON in', () => {
  const rows = Array.from({ length: 6 }, (_, i) => {
    const absorbance = line(i, 0.4).trim().split(',').slice(1).map(Number);
    return JSON.stringify(
      i === 0 ? { wavelength: [...axis], absorbance, sample: 'first' } : { absorbance, time: 10 * i },
    );
  });
  const run = (input: string) => spawnSync(process.execPath, [...base, '-', ...cell], { encoding: 'utf8', input });

  test('from standard input, one object a line, the axis in the first only', () => {
    const found = records(run(`${rows.join('\n')}\n`).stdout);
    expectWhole(found, 6);
    expect(found[0]!.label).toEqual({ sample: 'first', time: null });
    for (const record of found) expect(record.stateOfCharge.value).toBeCloseTo(0.4, 1);
  });

  test('a line that is no JSON or too short is withheld, the others are not', () => {
    const spoiled = [...rows.slice(0, 2), '{"absorbance":[0.1', '{"absorbance":[0.1,0.2]}', ...rows.slice(2)];
    const found = records(run(`${spoiled.join('\n')}\n`).stdout);
    expect(found.map((record) => record.state === 'withheld')).toEqual([
      false,
      false,
      true,
      true,
      false,
      false,
      false,
      false,
    ]);
    expect(codes(found[2]!)).toEqual(['not-json']);
    expect(codes(found[3]!)).toEqual(['length-differs']);
  });
});

test('a reader that goes away ends the run without a complaint', async () => {
  const path = file(head() + series(3000));
  const child = spawn('sh', ['-c', `"${process.execPath}" ${base.join(' ')} "${path}" ${cell.join(' ')} | head -n 1`], {
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  let errors = '';
  child.stderr.on('data', (chunk: Buffer) => (errors += chunk.toString()));
  await once(child, 'close');
  expect(errors).not.toContain('defect');
});

test.each([
  ['wavelength,a,b\n430,0.1,0.2\n435,0.1,0.2\n440,0.1,0.2\n', 'no-wavelengths'],
  ['', 'file-empty'],
])('%j cannot be followed: %s', (content, code) => {
  const run = follow(file(content));
  expect(run.status).toBe(3);
  expect(run.stderr).toContain(code);
});
