import type { Command } from 'commander';
import {
  benchReport,
  chartPicture,
  chartText,
  checkStandardChart,
  DEFAULT_CHART_DESIGN,
  readCheckLog,
  TankhueError,
} from '../index.ts';
import { readFileBytes, sha256Of, writeWhole } from '../io/files.ts';
import { optionOf } from './options.ts';

interface CheckOptions {
  value: string;
  unit: string;
  baseline: number;
  weight: number;
  averageLimit: number;
  slack: number;
  sumLimit: number;
  out?: string;
  report?: string;
  format: 'text' | 'json';
}

const { baselineCount, movingAverage, cumulativeSum } = DEFAULT_CHART_DESIGN;

export function register(program: Command): void {
  const command = program
    .command('check')
    .description('log of a check standard → is the measurement still what it was, since when not, and why')
    .argument('<log>', 'sheet with the columns taken_at, value, and lot, assigned, baseline, mode_… where known')
    .option('--value <column>', 'column to chart, e.g. state_of_charge', 'value')
    .option('--unit <unit>', 'unit of that column, for the text', '')
    .option(
      '--baseline <points>',
      'first points that make the baseline where no line is marked',
      numberAbove0('--baseline'),
      baselineCount,
    )
    .option(
      '--weight <w>',
      'weight of the newest point in the moving average',
      numberAbove0('--weight'),
      movingAverage.weight,
    )
    .option(
      '--average-limit <L>',
      'limit of the moving average, in its standard deviations',
      numberAbove0('--average-limit'),
      movingAverage.limit,
    )
    .option(
      '--slack <k>',
      'half the shift the cumulative sums look for, in standard deviations',
      numberAbove0('--slack'),
      cumulativeSum.slack,
    )
    .option(
      '--sum-limit <h>',
      'limit of the cumulative sums, in standard deviations',
      numberAbove0('--sum-limit'),
      cumulativeSum.limit,
    )
    .option('--out <file>', 'write the chart as JSON')
    .option('--report <file>', 'write text and pictures as one HTML file')
    .option('--format <format>', 'text or json', 'text')
    .action((log: string, options: CheckOptions) => run(command, log, options));
}

function numberAbove0(name: string): (text: string) => number {
  return optionOf(name, (text, where) => {
    const value = Number(text);
    if (value > 0 && value < Infinity) return value;
    throw new TankhueError(
      'out-of-range',
      `expected a number above 0; received "${text}"`,
      where,
      'write a plain number such as 0.5',
    );
  });
}

function run(command: Command, file: string, options: CheckOptions): void {
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
  if (options.weight > 1) command.error(`expected --weight above 0 up to 1; received ${options.weight}`);
  if (options.baseline < 3 || !Number.isInteger(options.baseline))
    command.error(`expected --baseline to be a whole number of 3 points or more; received ${options.baseline}`);
  const bytes = readFileBytes(file);
  const chart = checkStandardChart(readCheckLog(bytes, file, sha256Of(bytes), options.value, options.unit), {
    baselineCount: options.baseline,
    movingAverage: { weight: options.weight, limit: options.averageLimit },
    cumulativeSum: { slack: options.slack, limit: options.sumLimit },
  });
  const json = `${JSON.stringify(chart, null, 1)}\n`;
  if (options.out !== undefined) writeWhole(options.out, json, [file]);
  if (options.report !== undefined)
    writeWhole(
      options.report,
      benchReport(`Check standard, ${chart.quantity}`, chartText(chart), [chartPicture(chart)]),
      [file],
    );
  process.stdout.write(options.format === 'json' ? json : chartText(chart));
  if (chart.state === 'past-action') process.exitCode = 4;
}
