import type { Command } from 'commander';
import { benchReport, precisionStudy, precisionText, readReplicateSheet } from '../index.ts';
import { readFileBytes, sha256Of, writeWhole } from '../io/files.ts';

interface PrecisionOptions {
  out?: string;
  report?: string;
  format: 'text' | 'json';
}

export function register(program: Command): void {
  const command = program
    .command('precision')
    .description('sheet of replicate assays → repeatability and reproducibility, level by level')
    .argument('<sheet>', 'assays as CSV with columns such as laboratory, operator, day, filling added')
    .option('--out <file>', 'write the record that later assays take with --precision')
    .option('--report <file>', 'write the text as one HTML file')
    .option('--format <format>', 'text or json', 'text')
    .action((sheet: string, options: PrecisionOptions) => run(command, sheet, options));
}

function run(command: Command, sheet: string, options: PrecisionOptions): void {
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
  const bytes = readFileBytes(sheet);
  const record = precisionStudy(readReplicateSheet(bytes, sheet, sha256Of(bytes)));
  const json = `${JSON.stringify(record, null, 1)}\n`;
  if (options.out !== undefined) writeWhole(options.out, json, [sheet]);
  if (options.report !== undefined)
    writeWhole(options.report, benchReport('Precision of assays', precisionText(record), []), [sheet]);
  process.stdout.write(options.format === 'json' ? json : precisionText(record));
}
