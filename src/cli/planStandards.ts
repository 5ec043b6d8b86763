import type { Command } from 'commander';
import {
  PAIRS,
  parseLength,
  parsePositive,
  planStandards,
  planStandardsText,
  TankhueError,
  type Pair,
} from '../index.ts';
import { loadCalibration } from './inputs.ts';
import { optionOf } from './options.ts';

interface PlanStandardsOptions {
  calibration?: string;
  pair: Pair;
  count: number;
  totals?: number[];
  path?: number;
  stock?: number;
  volume: number;
  format: 'text' | 'json';
}

const number = (option: string, unit: string) => optionOf(option, (text, where) => parsePositive(text, unit, where));

export function register(plan: Command): void {
  plan
    .command('standards')
    .description('which standards to make next, with the volumes of two stocks')
    .requiredOption('--pair <pair>', 'V2/V3, V3/V4 or V4/V5', optionOf('--pair', parsePair))
    .option('--calibration <file>', 'calibration to improve; the shipped reference without it')
    .option('--count <n>', 'how many', optionOf('--count', parseCount), 6)
    .option(
      '--totals <list>',
      'mol/L in the cuvette that can be made, e.g. 0.9,1.3,1.8',
      optionOf('--totals', parseTotals),
    )
    .option(
      '--path <length>',
      'cell of the new standards, e.g. 0.2mm; that of the old ones without it',
      optionOf('--path', parseLength),
    )
    .option('--stock <c>', 'total of both stocks, mol/L; the largest total without it', number('--stock', 'mol/L'))
    .option('--volume <V>', 'volume of each standard', number('--volume', 'mL'), 10)
    .option('--format <format>', 'text or json', 'text')
    .action((options: PlanStandardsOptions) => run(options));
}

function run(options: PlanStandardsOptions): void {
  const { calibration } = loadCalibration(options.calibration);
  const pair = calibration.pairs.find((candidate) => candidate.pair === options.pair);
  if (!pair)
    throw new TankhueError(
      'not-calibrated',
      `expected one of ${calibration.pairs.map((one) => one.pair).join(', ')}; received ${options.pair}`,
      '--pair',
      'make first standards of this pair: seven shares at three totals',
    );
  const [least, most] = pair.domain.total;
  const totals = options.totals ?? [least, (least + most) / 2, most].map((total) => Number(total.toPrecision(3)));
  const stock = options.stock ?? Math.max(...totals);
  const plan = planStandards(pair, { count: options.count, totals, pathLength: options.path ?? pair.domain.path[1] });
  process.stdout.write(
    options.format === 'json'
      ? `${JSON.stringify({ schema: 'tankhue/standards-plan/1', pair: options.pair, stock_mol_L: stock, volume_mL: options.volume, ...plan }, null, 1)}\n`
      : planStandardsText(options.pair, plan, stock, options.volume),
  );
}

function parsePair(text: string, where: string): Pair {
  const pair = PAIRS.find((candidate) => candidate === text);
  if (pair) return pair;
  throw new TankhueError(
    'unknown-pair',
    `expected ${PAIRS.join(', ')}; received "${text}"`,
    where,
    'write V4/V5 for the positive side',
  );
}

function parseCount(text: string, where: string): number {
  const value = parsePositive(text, 'standards', where);
  if (Number.isInteger(value) && value <= 60) return value;
  throw new TankhueError(
    'out-of-range',
    `expected a whole number of 1 to 60; received "${text}"`,
    where,
    'write --count 6',
  );
}

const parseTotals = (text: string, where: string): number[] =>
  text.split(',').map((part) => parsePositive(part.trim(), 'mol/L', where));
