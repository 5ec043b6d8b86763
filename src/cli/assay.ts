import type { Command } from 'commander';
import {
  assayCsv,
  assayDocumentOf,
  assayReport,
  assayRows,
  assayText,
  DEFAULT_ASSAY_OPTIONS,
  optionsFromInstrument,
  precisionForAssay,
  readPrecisionRecord,
  parseDilution,
  parseLength,
  parseSide,
  parseTemperature,
  readAssayDocument,
  readBack,
  readInstrumentRecord,
  readSamplesSheet,
  TankhueError,
  TankhueErrors,
  type AssayDocument,
  type AssayOptions,
  type ReadOptions,
  type SamplesRow,
  type Side,
} from '../index.ts';
import { readFileBytes, requireWritable } from '../io/files.ts';
import { loadCalibration, SpectraShelf } from './inputs.ts';
import { MADE_BY, writeReport } from './reportFile.ts';
import { collected, optionOf, readingOptions, readOptionsOf, tell } from './options.ts';

interface AssayCliOptions extends ReadOptions {
  calibration?: string;
  sheet?: string;
  side?: Side;
  path?: number;
  dilution?: number;
  temperature?: number;
  blank?: string;
  instrument?: string;
  precision?: string;
  column: string[];
  format: 'text' | 'json' | 'ndjson' | 'csv';
  report?: string;
  from?: string;
}

export function register(program: Command): void {
  const command = program
    .command('assay')
    .description('spectra of cuvettes → composition and state of charge, with uncertainty and findings')
    .argument('[spectrum...]', 'files of spectra')
    .option(
      '--calibration <file>',
      'calibration file; without it the shipped reference is used and no result is better than caution',
    )
    .option('--sheet <file>', 'sheet of samples (CSV) instead of files')
    .option('--side <side>', 'negative, positive or composite', optionOf('--side', parseSide))
    .option('--path <length>', 'path of the cell, e.g. 1mm', optionOf('--path', parseLength))
    .option('--dilution <factor>', 'tank over cuvette, e.g. 20', optionOf('--dilution', parseDilution))
    .option('--temperature <t>', 'of the cuvette, e.g. 25C', optionOf('--temperature', parseTemperature))
    .option('--blank <file>', 'blank to subtract')
    .option('--instrument <file>', 'record of the photometer from tankhue verify: sets priors and ceiling')
    .option(
      '--precision <file>',
      'record of repeated fillings from tankhue precision: widens what the budget promises too much',
    )
    .option('--column <name>', 'column of the file; may be repeated; all without it', collected, [])
    .option('--format <format>', 'text, json, ndjson or csv', 'text')
    .option('--report <file>', 'also write a report: one HTML file that carries its record')
    .option('--from <report>', 'read the record of such a report instead of spectra')
    .action((files: string[], options: AssayCliOptions) => run(command, files, options));
  for (const option of readingOptions()) command.addOption(option);
}

async function run(command: Command, files: string[], options: AssayCliOptions): Promise<void> {
  if (!['text', 'json', 'ndjson', 'csv'].includes(options.format))
    command.error(`expected --format text, json, ndjson or csv; received ${options.format}`);
  if (options.report !== undefined) requireWritable(options.report, [...files, ...inputsOf(options)]);
  if (options.from !== undefined) return readReport(command, files, options);
  if ((options.sheet === undefined) === (files.length === 0))
    command.error('expected files of spectra, or --sheet SAMPLES.csv');
  if (options.sheet === undefined && options.side === undefined)
    command.error('expected --side negative, positive or composite with files of spectra');
  const inUse = loadCalibration(options.calibration);
  const shelf = new SpectraShelf(readOptionsOf(options), tell);
  const problems: TankhueError[] = [];
  const rows =
    options.sheet === undefined ? rowsOfFiles(files, options, shelf, problems) : rowsOfSheet(options.sheet, problems);
  const { cuvettes, problems: unread } = assayRows(
    rows,
    (row) => shelf.spectrum(options.sheet ?? '', row),
    inUse,
    assayOptionsOf(options),
  );
  problems.push(...unread);
  const document = assayDocumentOf(inUse, cuvettes);
  if (document.assays.length > 0) await print(document, options, [...inputsOf(options), ...shelf.paths]);
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
}

/** Reads the record of an earlier report instead of spectra. */
async function readReport(command: Command, files: readonly string[], options: AssayCliOptions): Promise<void> {
  const from = options.from!;
  if (files.length > 0 || options.sheet !== undefined)
    command.error('expected --from REPORT.html alone; received spectra or a sheet beside it');
  const text = await readBack(new TextDecoder().decode(readFileBytes(from)), from);
  await print(readAssayDocument(text, from), options, [from]);
}

async function print(document: AssayDocument, options: AssayCliOptions, inputs: readonly string[]): Promise<void> {
  process.stdout.write(formatted(document, options.format));
  if (options.report !== undefined) await writeReport(options.report, () => assayReport(document, MADE_BY), inputs);
  if (document.assays.some((assay) => assay.state === 'withheld')) process.exitCode = 4;
}

const inputsOf = (options: AssayCliOptions): string[] =>
  [options.sheet, options.calibration, options.instrument, options.blank].filter((file) => file !== undefined);

function formatted(document: AssayDocument, format: AssayCliOptions['format']): string {
  if (format === 'text') return assayText(document);
  if (format === 'csv') return assayCsv(document);
  if (format === 'json') return `${JSON.stringify(document, null, 1)}\n`;
  return document.assays
    .map((assay) => `${JSON.stringify({ schema: document.schema, calibration: document.calibration, ...assay })}\n`)
    .join('');
}

function rowsOfSheet(sheet: string, problems: TankhueError[]): SamplesRow[] {
  const read = readSamplesSheet(readFileBytes(sheet), sheet);
  problems.push(...read.problems);
  if (read.unknownColumns.length > 0) tell(`${sheet}: columns kept but not used: ${read.unknownColumns.join(', ')}`);
  return [...read.rows];
}

function rowsOfFiles(
  files: readonly string[],
  options: AssayCliOptions,
  shelf: SpectraShelf,
  problems: TankhueError[],
): SamplesRow[] {
  return files.flatMap((file): SamplesRow[] => {
    let names: readonly string[];
    try {
      const all = shelf.file(file).spectra.map((spectrum) => spectrum.name);
      names = options.column.length > 0 ? options.column : all;
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      problems.push(error);
      return [];
    }
    return names.map((column) => ({
      name: names.length === 1 && files.length > 1 ? file.replace(/^.*[\\/]/, '') : column,
      system: '',
      side: options.side!,
      file,
      column,
      blankFile: options.blank ?? null,
      blankColumn: null,
      blankExpected: false,
      pathLength: options.path ?? null,
      pathUncertainty: null,
      dilution: options.dilution ?? 1,
      dilutionUncertainty: null,
      temperature: options.temperature ?? null,
      acid: null,
      takenAt: null,
      scannedAt: null,
      inertGas: null,
      replicateOf: null,
      cell: null,
      flask: null,
      note: null,
      where: `${file}, --column`,
    }));
  });
}

/** Priors and ceiling of a checked photometer; the usual ones without a record. */
export function assayOptionsOf(files: { readonly instrument?: string; readonly precision?: string }): AssayOptions {
  const text = (file: string): string => new TextDecoder().decode(readFileBytes(file));
  const { instrument, precision } = files;
  const usual =
    instrument === undefined
      ? DEFAULT_ASSAY_OPTIONS
      : optionsFromInstrument(readInstrumentRecord(text(instrument), instrument), instrument);
  return precision === undefined
    ? usual
    : { ...usual, precision: precisionForAssay(readPrecisionRecord(text(precision), precision)) };
}
