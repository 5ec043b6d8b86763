// Speed of the engine beside its peers, all in one run, so that ratios mean something on any machine.
//   npm run bench              everything
//   npm run bench -- kernel    one part: kernel, scaling, threads, draws, file
import { spawn } from 'node:child_process';
import { createReadStream, existsSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { performance } from 'node:perf_hooks';
import { Worker } from 'node:worker_threads';
import { levenbergMarquardt } from 'ml-levenberg-marquardt';
import Papa from 'papaparse';
import { assumedPathUncertainty } from '../../dist/estimation/cuvette.js';
import { DEFAULT_MODE_PRIORS, namedModes } from '../../dist/estimation/namedModes.js';
import { prepare as prepareModel } from '../../dist/estimation/prepare.js';
import { reduce, solve } from '../../dist/estimation/solve.js';
import {
  amountsOf,
  drawComposition,
  newAmounts,
  parseCalibration,
  prepare,
  resample,
  seededRandom,
  simulateSpectrum,
} from '../../dist/index.js';

const WAVELENGTHS = 350;
const PAIR = 'V4/V5';
const PATH = 0.02;
const DISTINCT = 500;
const calibration = parseCalibration(readFileSync('calibration/reference.json', 'utf8'), 'reference.json');
const record = calibration.pairs.find((one) => one.pair === PAIR);

const axisOf = (points) => Float64Array.from({ length: points }, (_, i) => 430 + (520 * i) / (points - 1));

/** What a flow cell sees: a charge of an hour, the same filling throughout. */
const SERIES = (i) => ({ share: 0.2 + (0.6 * i) / DISTINCT, total: 1.6, noise: { constant: 0.0005 } });
/** Spectra that have nothing to do with each other. */
const MIXED = (_, random) => ({
  share: random.uniform(),
  total: 0.9 + 0.9 * random.uniform(),
  noise: { constant: 0.0005, filling: 0.02, pattern: 1 },
});

/** Rows of simulated spectra: `DISTINCT` different ones, again and again. */
function rowsOf(count, wavelength, kind = MIXED) {
  const random = seededRandom(1);
  const rows = new Float64Array(new SharedArrayBuffer(8 * count * wavelength.length));
  const distinct = Math.min(count, DISTINCT);
  for (let i = 0; i < distinct; i++) {
    const { share, total, noise } = kind(i, random);
    const { absorbance } = simulateSpectrum(
      calibration,
      {
        name: '',
        concentration: { V4: total * (1 - share), V5: total * share },
        pathLength: PATH,
        wavelength,
        noise,
      },
      random,
    );
    rows.set(absorbance, i * wavelength.length);
  }
  for (let done = distinct; done < count; done += distinct)
    rows.copyWithin(done * wavelength.length, 0, Math.min(distinct, count - done) * wavelength.length);
  return rows;
}

/** Best of several runs, seconds: other work on the machine only ever makes it slower. */
function bestOf(times, work) {
  let best = Infinity;
  for (let i = 0; i < times; i++) {
    const begun = performance.now();
    work();
    best = Math.min(best, performance.now() - begun);
  }
  return best / 1000;
}

const say = (what, figure, target = '') =>
  process.stdout.write(`${what.padEnd(58)} ${figure.padStart(20)}   ${target}\n`);
const perSecond = (count, seconds) => `${Math.round(count / seconds).toLocaleString('en')} /s`;
const head = (text) => process.stdout.write(`\n${text}\n`);

const without = (count) => ({
  stateOfCharge: new Float64Array(count),
  uncertainty: new Float64Array(count),
  totalVanadium: new Float64Array(count),
});

function kernel() {
  head(`${PAIR} with ${record.model.associations.map((one) => one.name).join(' and ')}, ${WAVELENGTHS} wavelengths`);
  const count = 20_000;
  const axis = axisOf(WAVELENGTHS);
  const rows = rowsOf(count, axis);
  const many = prepare(calibration, axis, { pair: PAIR, pathLength: PATH });
  const plain = without(count);
  const full = { ...without(count), chiSquare: new Float64Array(count) };
  const seconds = bestOf(12, () => many.solveMany(rows, plain));
  const secondsFull = bestOf(12, () => many.solveMany(rows, full));
  say('solveMany', perSecond(count, seconds), 'target 900,000 /s');
  say('solveMany with χ²', perSecond(count, secondsFull), 'target 180,000 /s');

  const { model } = record;
  const few = 300;
  const spectra = Array.from({ length: few }, (_, i) => rows.slice(i * WAVELENGTHS, (i + 1) * WAVELENGTHS));
  const prepared = prepareModel(model, namedModes(model.wavelength, DEFAULT_MODE_PRIORS));
  const priors = {
    pathLength: PATH,
    pathUncertainty: assumedPathUncertainty(PATH),
    wavelengthUncertainty: DEFAULT_MODE_PRIORS.wavelengthShift,
  };
  const reduced = spectra.map((absorbance) => {
    const means = resample({ wavelength: axis, absorbance }, model.wavelength, calibration.grid.step).absorbance;
    return reduce(prepared, means);
  });
  const secondsReference = bestOf(3, () => reduced.forEach((one) => solve(prepared, one, priors)));
  say('solve, the reference, already reduced', perSecond(few, secondsReference));

  const compressed = compressedFit(prepared, priors);
  const found = reduced.map((one, i) => compressed(one.z, full.stateOfCharge[i] > 0.5 ? [0.5, 0.9] : [0.9, 0.5]));
  const secondsCompressed = bestOf(3, () => reduced.forEach((one) => compressed(one.z, [0.7, 0.7])));
  const agreeing = found.filter(([a, b], i) => Math.abs(b / (a + b) - full.stateOfCharge[i]) < 1e-3).length;
  say(
    'ml-levenberg-marquardt, compressed data',
    perSecond(few, secondsCompressed),
    `${agreeing} of ${few} at the same answer`,
  );
  const secondsReduce = bestOf(5, () => reduced.length && spectra.forEach((row) => reduceRow(prepared, row)));
  say('  the compression alone, plain', perSecond(few, secondsReduce));

  const onAll = allPointsFit(model, axis);
  const fewer = 60;
  const secondsAll = bestOf(2, () => spectra.slice(0, fewer).forEach((row) => onAll(row)));
  say('ml-levenberg-marquardt, all points', perSecond(fewer, secondsAll));
  const ratio = (peer, peerCount) => `${(peer / peerCount / (secondsFull / count)).toFixed(0)} ×`;
  say('ratio with χ² to the compressed peer', ratio(secondsCompressed, few), 'target 3 ×');
  say('ratio with χ² to the peer on all points', ratio(secondsAll, fewer), 'target 100 ×');
}

const reduceRow = (prepared, row) => reduce(prepared, row.subarray(0, prepared.used.length));

/** The same objective through the library: reduced data and the two priors as data points, index as abscissa. */
function compressedFit(prepared, priors) {
  const { amountCount: k, dimension, image } = prepared;
  const amounts = newAmounts(k);
  const model = ([lower, higher, s, shift]) => {
    const { amount } = prepared.amounts(lower, higher, amounts);
    const y = Array.from(amount);
    const scale = priors.pathLength * Math.exp(s);
    return (i) => {
      if (i === dimension) return s / priors.pathUncertainty;
      if (i === dimension + 1) return shift / priors.wavelengthUncertainty;
      let sum = 0;
      for (let j = 0; j < k; j++) sum += scale * y[j] * (image[j][i] + shift * image[k + j][i]);
      return sum;
    };
  };
  const x = Array.from({ length: dimension + 2 }, (_, i) => i);
  return (z, start) =>
    levenbergMarquardt({ x, y: [...z, 0, 0] }, model, {
      initialValues: [...start, 0, 0],
      damping: 1e-4,
      gradientDifference: 1e-6,
      maxIterations: 30,
      errorTolerance: 1e-12,
    }).parameterValues;
}

/** What one would write first: both concentrations fitted to all readings. */
function allPointsFit(model, axis) {
  const spectra = model.spectra.map((values) => {
    let i = 0;
    return axis.map((nm) => {
      while (i < model.wavelength.length - 2 && model.wavelength[i + 1] < nm) i++;
      const part = (nm - model.wavelength[i]) / (model.wavelength[i + 1] - model.wavelength[i]);
      return values[i] * (1 - part) + values[i + 1] * part;
    });
  });
  const evaluate = amountsOf(model.pair, model.associations);
  const amounts = newAmounts(spectra.length);
  const fitted = ([lower, higher]) => {
    const y = Array.from(evaluate(lower, higher, amounts).amount);
    return (i) => spectra.reduce((sum, spectrum, j) => sum + PATH * y[j] * spectrum[i], 0);
  };
  const x = Array.from(axis.keys());
  return (row) =>
    levenbergMarquardt({ x, y: Array.from(row) }, fitted, {
      initialValues: [0.7, 0.7],
      damping: 1e-4,
      gradientDifference: 1e-6,
      maxIterations: 20,
      errorTolerance: 1e-12,
    }).parameterValues;
}

/** Slope of log time against log size. */
function exponentOf(sizes, seconds) {
  const x = sizes.map(Math.log);
  const y = seconds.map(Math.log);
  const mean = (values) => values.reduce((a, b) => a + b) / values.length;
  const [mx, my] = [mean(x), mean(y)];
  return (
    x.reduce((sum, value, i) => sum + (value - mx) * (y[i] - my), 0) /
    x.reduce((sum, value) => sum + (value - mx) ** 2, 0)
  );
}

function scaling() {
  head('Time against size');
  const axis = axisOf(WAVELENGTHS);
  const counts = [1000, 2000, 4000, 8000, 16_000];
  const rows = rowsOf(counts.at(-1), axis);
  const many = prepare(calibration, axis, { pair: PAIR, pathLength: PATH });
  const timeOf = (count) => {
    const part = rows.subarray(0, count * WAVELENGTHS);
    const out = { ...without(count), chiSquare: new Float64Array(count) };
    return bestOf(8, () => many.solveMany(part, out));
  };
  timeOf(8000);
  say('exponent in spectra', exponentOf(counts, counts.map(timeOf)).toFixed(3), 'linear is 1');
  const points = [350, 700, 1400, 2800];
  const seconds = points.map((n) => {
    const wavelength = axisOf(n);
    const own = rowsOf(2000, wavelength);
    const each = prepare(calibration, wavelength, { pair: PAIR, pathLength: PATH });
    const out = { ...without(2000), chiSquare: new Float64Array(2000) };
    return bestOf(8, () => each.solveMany(own, out));
  });
  say('exponent in wavelengths', exponentOf(points, seconds).toFixed(3), 'at most 1');
}

async function threads() {
  head('Threads');
  const rows = rowsOf(20_000, axisOf(WAVELENGTHS));
  const hire = () => {
    const worker = new Worker(new URL('./engineThread.mjs', import.meta.url), {
      workerData: { rows, points: WAVELENGTHS, pair: PAIR, pathLength: PATH },
    });
    const answer = () => new Promise((resolve) => worker.once('message', resolve));
    worker.on('error', (error) => {
      throw error;
    });
    return { worker, ask: (times) => (worker.postMessage(times), answer()), ready: answer() };
  };
  const workers = [hire(), hire()];
  await Promise.all(workers.map((one) => one.ready));
  const time = async (team, times) => {
    const begun = performance.now();
    await Promise.all(team.map((one) => one.ask(times / team.length)));
    return performance.now() - begun;
  };
  await time(workers, 8);
  const ratios = [];
  for (let i = 0; i < 7; i++) ratios.push((await time(workers.slice(0, 1), 20)) / (await time(workers, 20)));
  await Promise.all(workers.map(({ worker }) => worker.terminate()));
  ratios.sort((a, b) => a - b);
  say(
    'two workers against one, same work',
    `${ratios[3].toFixed(2)} × (best ${ratios[6].toFixed(2)})`,
    'target 1.8 ×, free cores',
  );
}

function draws() {
  head('Monte Carlo');
  const sources = Array.from({ length: 20 }, (_, i) => ({
    lower: 0.01 * Math.sin(i),
    higher: 0.01 * Math.cos(i),
    freedom: i < 2 ? 32 : Infinity,
  }));
  const random = seededRandom(1);
  const seconds = bestOf(20, () => drawComposition(0.8, 0.8, sources, 10_000, random));
  say('10,000 draws of 20 sources, two intervals', `${(1000 * seconds).toFixed(2)} ms`, 'target 10 ms');
}

async function file() {
  await oneFile('20,000 spectra × 350 of a series, CSV to NDJSON', SERIES);
  await oneFile('20,000 spectra × 350 that have nothing to do with each other, CSV to NDJSON', MIXED);
}

async function oneFile(title, kind) {
  head(title);
  const folder = mkdtempSync(join(tmpdir(), 'tankhue-bench-'));
  try {
    const path = join(folder, 'series.csv');
    const axis = axisOf(WAVELENGTHS);
    const rows = rowsOf(DISTINCT, axis, kind);
    const lines = Array.from({ length: DISTINCT }, (_, i) =>
      Array.from(rows.subarray(i * WAVELENGTHS, (i + 1) * WAVELENGTHS), (value) => value.toFixed(5)).join(','),
    );
    const text = Array.from({ length: 20_000 }, (_, i) => `${i},${lines[i % DISTINCT]}\n`);
    writeFileSync(path, `time_s,${Array.from(axis, (nm) => nm.toFixed(3)).join(',')}\n${text.join('')}`);
    const megabytes = statSync(path).size / 1e6;
    const best = { text: Infinity, numbers: Infinity, follow: Infinity, memory: 0 };
    for (let i = 0; i < 3; i++) {
      best.text = Math.min(best.text, await papaSeconds(path, false));
      best.numbers = Math.min(best.numbers, await papaSeconds(path, true));
      const { seconds, memory } = await followSeconds(path);
      best.follow = Math.min(best.follow, seconds);
      best.memory = Math.max(best.memory, memory);
    }
    const rate = (seconds) => `${(megabytes / seconds).toFixed(0)} MB/s`;
    say('papaparse alone, cells as text', rate(best.text));
    say('papaparse alone, cells as numbers', rate(best.numbers));
    say('tankhue follow --jobs 2, start of the process included', rate(best.follow), 'target 60 MB/s, or:');
    say('  time beside papaparse to numbers', `${(best.follow / best.numbers).toFixed(2)} ×`, 'target 1.3 ×');
    say('  its resident memory', best.memory > 0 ? `${best.memory.toFixed(0)} MB` : 'not known here', 'target 200 MB');
  } finally {
    rmSync(folder, { recursive: true });
  }
}

const papaSeconds = (path, dynamicTyping) =>
  new Promise((resolve, reject) => {
    const begun = performance.now();
    let cells = 0;
    Papa.parse(createReadStream(path), {
      dynamicTyping,
      step: ({ data }) => (cells += data.length),
      complete: () => resolve((performance.now() - begun) / 1000),
      error: reject,
    });
  });

function followSeconds(path) {
  return new Promise((resolve, reject) => {
    const begun = performance.now();
    const child = spawn(
      process.execPath,
      ['dist/cli/main.js', 'follow', path, '--side', 'positive', '--path', '0.2mm', '--jobs', '2'],
      { stdio: ['ignore', 'pipe', 'ignore'] },
    );
    let memory = 0;
    const look = setInterval(() => {
      const status = `/proc/${child.pid}/status`;
      if (!existsSync(status)) return;
      const peak = /VmHWM:\s+(\d+) kB/.exec(readFileSync(status, 'utf8'));
      if (peak) memory = Math.max(memory, Number(peak[1]) / 1000);
    }, 20);
    child.stdout.resume();
    child.on('error', reject);
    child.on('close', () => {
      clearInterval(look);
      resolve({ seconds: (performance.now() - begun) / 1000, memory });
    });
  });
}

const PARTS = { kernel, scaling, threads, draws, file };
const asked = process.argv.slice(2);
for (const [name, part] of Object.entries(PARTS)) if (asked.length === 0 || asked.includes(name)) await part();
