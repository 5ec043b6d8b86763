import { dirname, relative } from 'node:path';
import type { Command } from 'commander';
import {
  compositionAt,
  csvLine,
  NO_FAULTS,
  parseComposition,
  parseDilution,
  parseInUnits,
  parseLength,
  parseSide,
  seededRandom,
  sideHolding,
  simulateSpectrum,
  spectraCsv,
  spectraJcamp,
  VERSION,
  type Composition,
  type Side,
  type SimulatedFaults,
  type SimulatedNoise,
  type Spectrum,
} from '../index.ts';
import { requireWritable, writeWhole } from '../io/files.ts';
import { loadCalibration } from './inputs.ts';
import { optionOf, tell } from './options.ts';

interface SimulateOptions {
  calibration?: string;
  composition?: Composition;
  side?: Side;
  total?: number;
  stateOfCharge?: number[];
  path: number;
  dilution: number;
  from?: number;
  to?: number;
  step: number;
  repeat: number;
  seed: number;
  noise: number;
  shotNoise: number;
  filling: number;
  pattern: number;
  offset: number;
  slope: number;
  scatter: number;
  film: number;
  shift: number;
  bubble: number;
  stray: number;
  truePath?: number;
  trueDilution?: number;
  wrongBlank: number;
  air: number;
  out?: string;
  format: 'csv' | 'jcamp';
  sheet?: string;
  volume?: number;
}

/** A composition and what its column is called. */
interface Column {
  readonly name: string;
  readonly concentration: Composition;
}

const inUnits = (option: string, what: string, units: Record<string, number>, example: string) =>
  optionOf(option, (text, where) => parseInUnits(text, what, units, example, where));
const absorbance = (option: string) => inUnits(option, 'an absorbance', { A: 1, mA: 1e-3 }, '2mA');
const share = (option: string) => inUnits(option, 'a share', { '%': 0.01 }, '2%');
const nanometres = (option: string) => inUnits(option, 'a wavelength', { nm: 1, '': 1 }, '430nm');
const count = (option: string) =>
  optionOf(option, (text, where) => {
    const value = parseInUnits(text, 'a whole number', { '': 1 }, '5', where);
    return Math.trunc(value);
  });

export function register(program: Command): void {
  const command = program
    .command('simulate')
    .description('spectra of an electrolyte of known composition, with chosen faults and noise, to plan and to train')
    .option('--calibration <file>', 'calibration whose spectra are used; the shipped reference without it')
    .option(
      '--composition <list>',
      'mol/L of the tank, e.g. V4=0.8,V5=0.8 (V4 and V5 are totals)',
      optionOf('--composition', parseComposition),
    )
    .option('--side <side>', 'instead of --composition: negative or positive', optionOf('--side', parseSide))
    .option(
      '--total <c>',
      'total vanadium of the tank, e.g. 1.6mol/L',
      inUnits('--total', 'a concentration', { 'mol/L': 1, M: 1 }, '1.6mol/L'),
    )
    .option(
      '--state-of-charge <list>',
      'e.g. 40% or 0%,25%,50%: one column each; below 0 % is over-discharged',
      optionOf('--state-of-charge', (text, where) =>
        text.split(',').map((part) => parseInUnits(part, 'a state of charge', { '%': 0.01 }, '40%', where)),
      ),
    )
    .requiredOption('--path <length>', 'stated path of the cell, e.g. 1mm', optionOf('--path', parseLength))
    .option('--dilution <factor>', 'stated dilution, e.g. 20', optionOf('--dilution', parseDilution), 1)
    .option(
      '--from <nm>',
      "first wavelength, e.g. 450nm; without it as far as the calibration's means reach",
      nanometres('--from'),
    )
    .option('--to <nm>', 'last wavelength', nanometres('--to'))
    .option('--step <nm>', 'step of the axis', nanometres('--step'), 1)
    .option('--repeat <n>', 'spectra of each composition, noise drawn anew', count('--repeat'), 1)
    .option('--seed <n>', 'the same seed gives the same file', count('--seed'), 1)
    .option('--noise <A>', 'noise of each reading, e.g. 0.5mA', absorbance('--noise'), 0)
    .option('--shot-noise <A>', 'noise at full transmission that grows with absorbance', absorbance('--shot-noise'), 0)
    .option('--filling <share>', 'scatter of the path from filling to filling, e.g. 1%', share('--filling'), 0)
    .option(
      '--pattern <n>',
      "unnamed patterns of the calibration's standards, in their standard deviations",
      inUnits('--pattern', 'a factor', { '': 1 }, '1'),
      0,
    )
    .option('--offset <A>', 'fault: baseline offset, e.g. 5mA', absorbance('--offset'), 0)
    .option('--slope <A>', 'fault: tilt of the baseline per 100 nm, e.g. 2mA', absorbance('--slope'), 0)
    .option('--scatter <A>', 'fault: fine particles, at 450 nm', absorbance('--scatter'), 0)
    .option('--film <A>', 'fault: deposit on the window, at 450 nm', absorbance('--film'), 0)
    .option('--shift <nm>', 'fault: wavelength scale reads long by', inUnits('--shift', 'a shift', { nm: 1 }, '1nm'), 0)
    .option('--bubble <share>', 'fault: light that passes beside the sample, e.g. 2%', share('--bubble'), 0)
    .option('--stray <share>', 'fault: stray light, e.g. 0.1%', share('--stray'), 0)
    .option('--true-path <length>', 'fault: the path the cell really has', optionOf('--true-path', parseLength))
    .option('--true-dilution <factor>', 'fault: the dilution really made', optionOf('--true-dilution', parseDilution))
    .option('--wrong-blank <A>', 'fault: blank of water in another cell, reads high by', absorbance('--wrong-blank'), 0)
    .option(
      '--air <volumes>',
      'fault: volumes of air taken up by one of undiluted sample, e.g. 0.5',
      inUnits('--air', 'a volume ratio', { '': 1, 'L/L': 1, 'mL/mL': 1 }, '0.5'),
      0,
    )
    .option('--out <file>', 'file of spectra; standard output without it')
    .option('--format <format>', 'csv or jcamp', 'csv')
    .option('--sheet <file>', 'also write a sheet of samples that names the file of --out')
    .option(
      '--volume <V>',
      'volume of the tank, e.g. 2000L: the sheet becomes one of tanks',
      inUnits('--volume', 'a volume', { L: 1, m3: 1000 }, '2000L'),
    )
    .action((options: SimulateOptions) => run(command, options));
}

function run(command: Command, options: SimulateOptions): void {
  refuseContradictions(command, options);
  if (options.out !== undefined) requireWritable(options.out, []);
  if (options.sheet !== undefined) requireWritable(options.sheet, [options.out!]);
  const { calibration } = loadCalibration(options.calibration);
  const wavelength = axisOf(calibration.grid, options);
  const random = seededRandom(options.seed);
  const columns = columnsOf(options);
  const spectra = columns.map(({ name, concentration }) =>
    simulateSpectrum(
      calibration,
      {
        name,
        concentration,
        wavelength,
        pathLength: options.path,
        dilution: options.dilution,
        faults: faultsOf(options),
        noise: noiseOf(options),
      },
      random,
    ),
  ) as [Spectrum, ...Spectrum[]];
  const origin = `simulated by tankhue ${VERSION}, seed ${options.seed}`;
  const text = options.format === 'csv' ? spectraCsv(spectra) : spectraJcamp(spectra, origin, origin);
  if (options.out === undefined) process.stdout.write(text);
  else writeWhole(options.out, text, options.calibration ? [options.calibration] : []);
  if (options.sheet !== undefined) writeWhole(options.sheet, sheetOf(columns, options, options.out!, options.sheet));
  tell(
    `${spectra.length} ${spectra.length === 1 ? 'spectrum' : 'spectra'}, ${origin}, calibration ${calibration.name}`,
  );
}

function refuseContradictions(command: Command, options: SimulateOptions): void {
  const bySide = options.total !== undefined || options.stateOfCharge !== undefined;
  if ((options.composition === undefined) !== bySide)
    command.error('expected --composition, or --side with --total and --state-of-charge; received both or neither');
  if (bySide && (options.side === undefined || options.total === undefined || options.stateOfCharge === undefined))
    command.error('expected --side, --total and --state-of-charge together');
  if (!['csv', 'jcamp'].includes(options.format))
    command.error(`expected --format csv or jcamp; received ${options.format}`);
  if (options.sheet !== undefined && options.out === undefined)
    command.error('expected --out with --sheet, which names the file of spectra');
  if (options.volume !== undefined && options.sheet === undefined) command.error('expected --sheet with --volume');
  if (!(options.repeat >= 1)) command.error(`expected --repeat 1 or more; received ${options.repeat}`);
  if (!(options.step > 0)) command.error(`expected --step above 0 nm; received ${options.step}`);
}

/** Without --from and --to as far as a scan must reach to fill the calibration's outermost means. */
function axisOf(grid: { from: number; to: number; step: number }, options: SimulateOptions): Float64Array {
  const { step } = options;
  const margin = Math.max(0, Math.ceil(grid.step / 2 / step) - 1) * step;
  const { from = grid.from - margin, to = grid.to + margin } = options;
  const points = Math.max(0, Math.floor((to - from) / step + 1e-9)) + 1;
  return Float64Array.from({ length: points }, (_, i) => from + i * step);
}

function columnsOf(options: SimulateOptions): Column[] {
  const compositions: Column[] = options.composition
    ? [{ name: 'simulated', concentration: options.composition }]
    : options.stateOfCharge!.map((stateOfCharge) => ({
        name: `${options.side} ${Number((100 * stateOfCharge).toFixed(6))} %`,
        concentration: compositionAt(options.side!, options.total!, stateOfCharge),
      }));
  if (options.repeat === 1) return compositions;
  return compositions.flatMap(({ name, concentration }) =>
    Array.from({ length: options.repeat }, (_, i) => ({ name: `${name} ${i + 1}`, concentration })),
  );
}

const faultsOf = (options: SimulateOptions): SimulatedFaults => ({
  ...NO_FAULTS,
  offset: options.offset,
  slope: options.slope,
  scatter: options.scatter,
  film: options.film,
  wavelengthShift: options.shift,
  bubble: options.bubble,
  strayLight: options.stray,
  pathFactor: (options.truePath ?? options.path) / options.path,
  dilutionFactor: (options.trueDilution ?? options.dilution) / options.dilution,
  wrongBlank: options.wrongBlank,
  airExposure: options.air,
});

const noiseOf = (options: SimulateOptions): SimulatedNoise => ({
  constant: options.noise,
  shot: options.shotNoise,
  filling: options.filling,
  pattern: options.pattern,
});

/** What a person would have written down; the truth stands in the note. */
function sheetOf(columns: readonly Column[], options: SimulateOptions, file: string, sheet: string): string {
  const tanks = options.volume !== undefined;
  const head = ['sample', 'side', 'file', 'column', 'path_mm', 'dilution', ...(tanks ? ['volume_L'] : []), 'note'];
  const rows = columns.map(({ name, concentration }) =>
    csvLine([
      name,
      options.side ?? sideHolding(concentration),
      relative(dirname(sheet), file),
      name,
      Number((options.path * 10).toPrecision(12)),
      options.dilution,
      ...(tanks ? [options.volume!] : []),
      `simulated from ${Object.entries(concentration)
        .map(([species, value]) => `${species} ${Number(value.toPrecision(6))} mol/L`)
        .join(' and ')}; seed ${options.seed}`,
    ]),
  );
  return `${[csvLine(head), ...rows].join('\n')}\n`;
}
