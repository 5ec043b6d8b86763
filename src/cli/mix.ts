import type { Command } from 'commander';
import {
  benchReport,
  blend,
  dilutionSeries,
  DISCLAIMER,
  dissolve,
  electrolyse,
  findStock,
  mixPicture,
  mixText,
  NO_SPECTRUM,
  parseComposition,
  parseInUnits,
  parseOxidationState,
  parsePositive,
  readStocksSheet,
  readTargetsSheet,
  SOLIDS,
  standardsRowsCsv,
  TankhueError,
  type BlendTarget,
  type Composition,
  type ElectrolysisStage,
  type GlassClass,
  type MixDocument,
  type MixingBench,
  type Mixture,
  type Solid,
} from '../index.ts';
import { readFileBytes, requireWritable, writeWhole } from '../io/files.ts';
import { optionOf, tell } from './options.ts';

interface OutputOptions {
  class: GlassClass;
  standards?: string;
  report?: string;
  format: 'text' | 'json';
}

interface BlendOptions extends OutputOptions {
  target?: Composition;
  targets?: string;
  volume?: number;
  acid?: number;
  name: string;
  byMass?: true;
}

interface DiluteOptions extends OutputOptions {
  stock: string;
  to: number[];
  volume: number;
}

interface DissolveOptions extends OutputOptions {
  solid: Solid;
  total: number;
  acid: number;
  volume: number;
  vanadium?: number[];
  water: [number, number];
  state: 'V4' | 'V5';
  acidStock: number;
  name?: string;
}

interface ChargeOptions extends OutputOptions {
  stock: string;
  volume: number;
  volumeU?: number;
  to?: number;
  passed?: number;
  passedU?: number;
  efficiency: number;
  efficiencyU: number;
  current?: number;
  name?: string;
}

const millilitres = (option: string) =>
  optionOf(option, (text, where) => parseInUnits(text, 'a volume', { mL: 1, L: 1000 }, '100mL', where));
const concentration = (option: string) => optionOf(option, (text, where) => parsePositive(text, 'mol/L', where));
const share = (option: string) =>
  optionOf(option, (text, where) => parseInUnits(text, 'a share', { '%': 0.01 }, '98%', where));
const list = (option: string) =>
  optionOf(option, (text, where) => text.split(',').map((part) => parsePositive(part.trim(), 'mol/L', where)));
const ampereHours = (option: string) =>
  optionOf(option, (text, where) => parseInUnits(text, 'a charge', { Ah: 1, mAh: 1e-3, C: 1 / 3600 }, '4.3Ah', where));

export function register(program: Command): void {
  const mix = program
    .command('mix')
    .description('standards, blends and stocks: what to measure out, step by step, and what the label may say');
  registerBlend(mix);
  registerDilute(mix);
  registerDissolve(mix);
  registerCharge(mix);
}

const withOutput = (command: Command): Command =>
  command
    .option('--class <class>', 'class of pipettes and flasks: A or B', 'A')
    .option('--standards <file>', 'write the labels as rows of a standards sheet')
    .option('--report <file>', 'write steps and portions as one HTML file')
    .option('--format <format>', 'text or json', 'text');

function registerBlend(mix: Command): void {
  const command = withOutput(
    mix
      .command('blend')
      .description('a wanted composition from the stocks at hand; states that cannot coexist react')
      .argument('<stocks>', 'CSV of stocks: stock, V2_mol_L … V5_mol_L, u_mol_L, acid_mol_L, available_mL')
      .option('--target <list>', 'mol/L wanted, e.g. V4=0.8,V5=0.8', optionOf('--target', parseComposition))
      .option('--volume <V>', 'how much of it, e.g. 100mL', millilitres('--volume'))
      .option(
        '--acid <c>',
        'total sulfate wanted, e.g. "4.5 mol/L"; that of the stocks without it',
        concentration('--acid'),
      )
      .option('--name <name>', 'what the bottle will be called', 'mixture')
      .option('--targets <sheet>', 'instead: CSV with one bottle a line')
      .option('--by-mass', 'weigh stocks whose density is on the sheet'),
  ).action((stocks: string, options: BlendOptions) => {
    requireChoices(command, options);
    if ((options.target === undefined) === (options.targets === undefined))
      command.error('expected --target with --volume, or --targets; received both or neither');
    if (options.target !== undefined && options.volume === undefined) command.error('expected --volume with --target');
    const inputs = [stocks, ...(options.targets === undefined ? [] : [options.targets])];
    const sheet = stocksOf(stocks);
    const targets = options.targets === undefined ? [targetOf(options)] : targetsOf(options.targets);
    const bench: MixingBench = {
      stocks: sheet.stocks,
      glassClass: options.class,
      byMass: options.byMass ?? false,
    };
    const mixtures = targets.map((target) => blend(target, bench).mixture);
    finish('blend', withAssumed(mixtures, sheet.assumed), [], options, inputs);
  });
}

const targetOf = ({ target, volume, acid, name }: BlendOptions): BlendTarget => ({
  name,
  concentration: target!,
  volume: volume!,
  sulfate: acid ?? null,
  spectrum: NO_SPECTRUM,
});

function registerDilute(mix: Command): void {
  const command = withOutput(
    mix
      .command('dilute')
      .description('a series of dilutions of one stock with the acid that keeps its matrix')
      .argument('<stocks>', 'CSV of stocks, the acid among them')
      .requiredOption('--stock <name>', 'which one to dilute')
      .requiredOption('--to <list>', 'totals wanted, mol/L, e.g. 0.8,0.4,0.1', list('--to'))
      .requiredOption('--volume <V>', 'how much of each, e.g. 50mL', millilitres('--volume')),
  ).action((stocks: string, options: DiluteOptions) => {
    requireChoices(command, options);
    const sheet = stocksOf(stocks);
    const bench: MixingBench = { stocks: sheet.stocks, glassClass: options.class, byMass: false };
    const stock = findStock(sheet.stocks, options.stock, '--stock');
    const mixtures = dilutionSeries(stock, options.to, options.volume, bench);
    finish('dilute', withAssumed(mixtures, sheet.assumed), [], options, [stocks]);
  });
}

function registerDissolve(mix: Command): void {
  const command = withOutput(
    mix
      .command('dissolve')
      .description('a stock from vanadyl sulfate hydrate or vanadium pentoxide')
      .requiredOption('--solid <solid>', SOLIDS.join(' or '))
      .requiredOption('--total <c>', 'vanadium wanted, e.g. "1.6 mol/L"', concentration('--total'))
      .requiredOption('--acid <c>', 'total sulfate wanted, that of the salt included', concentration('--acid'))
      .requiredOption('--volume <V>', 'e.g. 500mL', millilitres('--volume'))
      .option(
        '--vanadium <content>',
        'mass fraction of vanadium by analysis and its uncertainty, e.g. 21.4%,0.2%',
        optionOf('--vanadium', (text, where) =>
          text.split(',').map((part) => parseInUnits(part.trim(), 'a content', { '%': 0.01 }, '21.4%,0.2%', where)),
        ),
      )
      .option(
        '--water <range>',
        'water of crystallisation of vanadyl sulfate, lowest and highest, e.g. 3,5',
        optionOf('--water', (text, where) => waterOf(text, where)),
        [3, 5],
      )
      .option('--state <state>', 'of pentoxide: V4 (reduced with oxalic acid) or V5', 'V4')
      .option('--acid-stock <c>', 'strength of the sulfuric acid at hand', concentration('--acid-stock'), 18)
      .option('--name <name>', 'what the bottle will be called'),
  ).action((options: DissolveOptions) => {
    requireChoices(command, options);
    if (!SOLIDS.includes(options.solid))
      command.error(`expected --solid ${SOLIDS.join(' or ')}; received ${options.solid}`);
    if (!['V4', 'V5'].includes(options.state)) command.error(`expected --state V4 or V5; received ${options.state}`);
    const [content, contentU] = options.vanadium ?? [];
    const mixture = dissolve({
      name: options.name ?? options.solid,
      solid: options.solid,
      vanadiumFraction: content === undefined ? null : { value: content, uncertainty: contentU ?? 0.005 * content },
      water: options.water,
      state: options.state,
      total: options.total,
      sulfate: options.acid,
      volume: options.volume,
      acidStock: options.acidStock,
      glassClass: options.class,
    });
    finish('dissolve', [mixture], [], options, []);
  });
}

function waterOf(text: string, where: string): [number, number] {
  const parts = text
    .split(',')
    .map((part) => parseInUnits(part.trim(), 'a number of water molecules', { '': 1 }, '3,5', where));
  const [low, high] = [parts[0]!, parts.at(-1)!];
  if (parts.length <= 2 && low >= 0 && high >= low) return [low, high];
  throw new TankhueError(
    'out-of-range',
    `expected lowest and highest water content; received ${text}`,
    where,
    'write 3,5',
  );
}

function registerCharge(mix: Command): void {
  const command = withOutput(
    mix
      .command('charge')
      .description('a stock taken to another state in a divided cell: charge, stages, label by the coulombs')
      .argument('<stocks>', 'CSV of stocks')
      .requiredOption('--stock <name>', 'what goes into the half cell')
      .requiredOption('--volume <V>', 'how much of it, e.g. 100mL', millilitres('--volume'))
      .option('--volume-u <V>', 'standard uncertainty of the volume; 0.5 % without it', millilitres('--volume-u'))
      .option('--to <state>', 'V2, V3, V4, V5 or a mean oxidation state', optionOf('--to', parseOxidationState))
      .option(
        '--passed <charge>',
        'instead: the charge that was passed, e.g. 4.3Ah; negative reduces',
        ampereHours('--passed'),
      )
      .option('--passed-u <charge>', 'standard uncertainty of that charge; 0.2 % without it', ampereHours('--passed-u'))
      .option('--efficiency <share>', 'share of the current that reacts with vanadium', share('--efficiency'), 0.98)
      .option('--efficiency-u <share>', 'standard uncertainty of it', share('--efficiency-u'), 0.01)
      .option(
        '--current <I>',
        'e.g. 1A',
        optionOf('--current', (text, where) => parsePositive(text, 'A', where)),
      )
      .option('--name <name>', 'what the bottle will be called'),
  ).action((stocks: string, options: ChargeOptions) => {
    requireChoices(command, options);
    if ((options.to === undefined) === (options.passed === undefined))
      command.error('expected --to or --passed; received both or neither');
    const sheet = stocksOf(stocks);
    const { mixture, stages } = electrolyse({
      name: options.name ?? `${options.stock} charged`,
      stock: findStock(sheet.stocks, options.stock, '--stock'),
      volume: { value: options.volume, uncertainty: options.volumeU ?? 0.005 * options.volume },
      oxidationState: options.to ?? null,
      charge:
        options.passed === undefined
          ? null
          : { value: options.passed, uncertainty: options.passedU ?? 0.002 * Math.abs(options.passed) },
      efficiency: { value: options.efficiency, uncertainty: options.efficiencyU },
      current: options.current ?? null,
    });
    finish('charge', withAssumed([mixture], sheet.assumed), stages, options, [stocks]);
  });
}

function requireChoices(command: Command, options: OutputOptions): void {
  if (!['A', 'B'].includes(options.class)) command.error(`expected --class A or B; received ${options.class}`);
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
}

function stocksOf(path: string) {
  const sheet = readStocksSheet(readFileBytes(path), path);
  if (sheet.unknownColumns.length > 0) tell(`columns not used: ${sheet.unknownColumns.join(', ')}`);
  return sheet;
}

function targetsOf(path: string): BlendTarget[] {
  const sheet = readTargetsSheet(readFileBytes(path), path);
  if (sheet.unknownColumns.length > 0) tell(`columns not used: ${sheet.unknownColumns.join(', ')}`);
  return sheet.targets;
}

/** What the sheet of stocks left open concerns only the bottles that are made of them. */
const withAssumed = (mixtures: readonly Mixture[], assumed: readonly string[]): Mixture[] =>
  mixtures.map((mixture) => ({
    ...mixture,
    assumed: [
      ...mixture.assumed,
      ...assumed.filter((sentence) => mixture.portions.some(({ stock }) => sentence.startsWith(`${stock} `))),
    ],
  }));

function finish(
  task: MixDocument['task'],
  mixtures: Mixture[],
  stages: ElectrolysisStage[],
  options: OutputOptions,
  inputs: readonly string[],
): void {
  const document: MixDocument = { schema: 'tankhue/mix/1', task, mixtures, stages, disclaimer: DISCLAIMER };
  const rows = mixtures.flatMap(({ standardsRow }) => (standardsRow ? [standardsRow] : []));
  for (const out of [options.standards, options.report]) if (out !== undefined) requireWritable(out, inputs);
  if (options.standards !== undefined) writeWhole(options.standards, standardsRowsCsv(rows), inputs);
  if (options.report !== undefined)
    writeWhole(options.report, benchReport('Mixing', mixText(document), [mixPicture(mixtures)]), inputs);
  process.stdout.write(options.format === 'json' ? `${JSON.stringify(document, null, 1)}\n` : mixText(document));
  if (mixtures.some(({ state }) => state === 'withheld')) process.exitCode = 4;
}
