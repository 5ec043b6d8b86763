import type { Command } from 'commander';
import {
  benchReport,
  readAssayNumbers,
  readTitrations,
  relabelStandards,
  standardsRowsCsv,
  TankhueError,
  titrate,
  titrationPicture,
  titrationText,
  type CurveFile,
  type StandardsSheetRow,
  type TitrationDocument,
} from '../index.ts';
import { readFileBytes, requireWritable, sha256Of, writeWhole } from '../io/files.ts';
import { tell } from './options.ts';

interface TitrateOptions {
  sheet?: string;
  against?: string;
  standards?: string;
  relabel?: string;
  report?: string;
  format: 'text' | 'json';
}

export function register(program: Command): void {
  const command = program
    .command('titrate')
    .description('potentiometric titration curves → concentrations, mean oxidation state, state of charge')
    .argument('<curves...>', 'CSV with volume_mL and potential_mV; several curves by a column run')
    .option('--sheet <file>', 'sheet with one line a run, where the curve files hold readings only')
    .option('--against <file>', 'assays of the same samples (JSON): do they agree?')
    .option('--standards <file>', 'write the titrated samples as rows of a standards sheet')
    .option('--relabel <sheet>', 'with --standards: take the rows of this standards sheet, with the labels titrated')
    .option('--report <file>', 'write text and curves as one HTML file')
    .option('--format <format>', 'text or json', 'text')
    .action((curves: string[], options: TitrateOptions) => run(command, curves, options));
}

function run(command: Command, curves: string[], options: TitrateOptions): void {
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
  if (options.relabel !== undefined && options.standards === undefined)
    command.error('expected --standards with --relabel, which names the sheet to write');
  const inputs = [...curves, ...[options.sheet, options.against, options.relabel].filter((file) => file !== undefined)];
  for (const out of [options.standards, options.report]) if (out !== undefined) requireWritable(out, inputs);
  const { runs, unknownColumns } = readTitrations(
    curves.map(curveFile),
    options.sheet === undefined ? null : curveFile(options.sheet),
  );
  if (unknownColumns.length > 0) tell(`columns not used: ${unknownColumns.join(', ')}`);
  const document = titrate(runs, options.against === undefined ? [] : assaysOf(options.against));
  if (options.against !== undefined) requireComparison(document, options.against);
  const rows = document.titrations.flatMap(({ standardsRow }) => (standardsRow ? [standardsRow] : []));
  if (options.standards !== undefined) writeWhole(options.standards, standardsOf(rows, options.relabel), inputs);
  if (options.report !== undefined)
    writeWhole(
      options.report,
      benchReport('Titrations', titrationText(document), document.runs.map(titrationPicture)),
      inputs,
    );
  process.stdout.write(options.format === 'json' ? `${JSON.stringify(document, null, 1)}\n` : titrationText(document));
  if ([...document.titrations, ...document.runs].some(({ state }) => state === 'withheld')) process.exitCode = 4;
}

/** Rows of their own, or those of a sheet with new labels. */
function standardsOf(rows: readonly StandardsSheetRow[], sheet: string | undefined): string {
  if (sheet === undefined) return standardsRowsCsv(rows);
  const relabelled = relabelStandards(readFileBytes(sheet), sheet, rows);
  for (const { standard, before, after } of relabelled.changed)
    tell(`${standard}: label was ${before}, is ${after} mol/L`);
  return standardsRowsCsv(relabelled.rows, relabelled.columns);
}

function curveFile(path: string): CurveFile {
  const bytes = readFileBytes(path);
  return { bytes, origin: { file: path, column: '', sha256: sha256Of(bytes) } };
}

const assaysOf = (path: string) => readAssayNumbers(new TextDecoder().decode(readFileBytes(path)), path);

function requireComparison(document: TitrationDocument, path: string): void {
  const names = assaysOf(path).map(({ sample }) => sample);
  const found = document.titrations.some(({ sample }) => names.includes(sample));
  if (found) return;
  throw new TankhueError(
    'sample-unknown',
    `expected an assay of ${document.titrations.map(({ sample }) => sample).join(', ')}; received assays of ${names.slice(0, 10).join(', ')}`,
    path,
    'give the sample one name in both sheets',
  );
}
