import type { Command } from 'commander';
import {
  assayRows,
  balanceCsv,
  balanceDocumentOf,
  balanceReport,
  balanceText,
  readTanksSheet,
  TankhueError,
  TankhueErrors,
  withReplicatesCombined,
  type BalanceDocument,
  type ReadOptions,
} from '../index.ts';
import { readFileBytes, requireWritable } from '../io/files.ts';
import { assayOptionsOf } from './assay.ts';
import { loadCalibration, SpectraShelf } from './inputs.ts';
import { readingOptions, readOptionsOf, tell } from './options.ts';
import { MADE_BY, writeReport } from './reportFile.ts';

interface BalanceOptions extends ReadOptions {
  calibration?: string;
  instrument?: string;
  precision?: string;
  format: 'text' | 'json' | 'csv';
  report?: string;
}

export function register(program: Command): void {
  const command = program
    .command('balance')
    .description('two tanks → in balance or not, why, and what puts it right')
    .argument('<tanks>', 'sheet of tanks (CSV)')
    .option('--calibration <file>', 'calibration file; without it the shipped reference is used')
    .option('--instrument <file>', 'record of the photometer from tankhue verify: sets priors and ceiling')
    .option(
      '--precision <file>',
      'record of repeated fillings from tankhue precision: widens what the budget promises too much',
    )
    .option('--format <format>', 'text, json or csv', 'text')
    .option('--report <file>', 'also write a report: one HTML file that carries its record')
    .action((sheet: string, options: BalanceOptions) => run(command, sheet, options));
  for (const option of readingOptions()) command.addOption(option);
}

async function run(command: Command, sheet: string, options: BalanceOptions): Promise<void> {
  if (!['text', 'json', 'csv'].includes(options.format))
    command.error(`expected --format text, json or csv; received ${options.format}`);
  const inputs = [sheet, options.calibration, options.instrument, options.precision].filter(
    (file) => file !== undefined,
  );
  if (options.report !== undefined) requireWritable(options.report, inputs);
  const inUse = loadCalibration(options.calibration);
  const shelf = new SpectraShelf(readOptionsOf(options), options.format === 'text' ? () => {} : tell);
  const read = readTanksSheet(readFileBytes(sheet), sheet);
  const problems: TankhueError[] = [...read.problems];
  if (read.unknownColumns.length > 0) tell(`${sheet}: columns kept but not used: ${read.unknownColumns.join(', ')}`);
  const { cuvettes, problems: unread } = assayRows(
    read.rows,
    (row) => shelf.spectrum(sheet, row),
    inUse,
    assayOptionsOf(options),
  );
  problems.push(...unread);
  const document = balanceDocumentOf(inUse, read.rows, cuvettes);
  if (document.systems.length > 0) process.stdout.write(formatted(document, options.format));
  if (options.report !== undefined)
    await writeReport(options.report, () => balanceReport(document, MADE_BY), [...inputs, ...shelf.paths]);
  if (withReplicatesCombined(cuvettes).some(({ assay }) => assay.state === 'withheld')) process.exitCode = 4;
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
}

function formatted(document: BalanceDocument, format: BalanceOptions['format']): string {
  if (format === 'json') return `${JSON.stringify(document, null, 1)}\n`;
  return format === 'csv' ? balanceCsv(document) : balanceText(document, process.stdout.columns);
}
