import type { Command } from 'commander';
import {
  assayCsv,
  assaySample,
  assayText,
  combineReplicates,
  DEFAULT_ASSAY_OPTIONS,
  optionsFromInstrument,
  readInstrumentRecord,
  type AssayOptions,
  parseDilution,
  parseLength,
  parseSide,
  parseTemperature,
  readSamplesSheet,
  TankhueError,
  TankhueErrors,
  type AssayDocument,
  type AssayResult,
  type CalibrationInUse,
  type ReadOptions,
  type Sample,
  type SamplesRow,
  type Side,
} from '../index.ts';
import { readFileBytes } from '../io/files.ts';
import { loadCalibration, SpectraShelf } from './inputs.ts';
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
  column: string[];
  format: 'text' | 'json' | 'ndjson' | 'csv';
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
    .option('--column <name>', 'column of the file; may be repeated; all without it', collected, [])
    .option('--format <format>', 'text, json, ndjson or csv', 'text')
    .action((files: string[], options: AssayCliOptions) => run(command, files, options));
  for (const option of readingOptions()) command.addOption(option);
}

function run(command: Command, files: string[], options: AssayCliOptions): void {
  if (!['text', 'json', 'ndjson', 'csv'].includes(options.format))
    command.error(`expected --format text, json, ndjson or csv; received ${options.format}`);
  if ((options.sheet === undefined) === (files.length === 0))
    command.error('expected files of spectra, or --sheet SAMPLES.csv');
  if (options.sheet === undefined && options.side === undefined)
    command.error('expected --side negative, positive or composite with files of spectra');
  const inUse = loadCalibration(options.calibration);
  const shelf = new SpectraShelf(readOptionsOf(options), tell);
  const problems: TankhueError[] = [];
  const rows =
    options.sheet === undefined ? rowsOfFiles(files, options, shelf, problems) : rowsOfSheet(options.sheet, problems);
  const assayOptions = assayOptionsOf(options.instrument);
  const done = rows.flatMap((row): { row: SamplesRow; assay: AssayResult }[] => {
    try {
      return [{ row, assay: assaySample(sampleOf(row, shelf, options.sheet ?? ''), inUse, assayOptions) }];
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      problems.push(error);
      return [];
    }
  });
  const assays = [
    ...done.map(({ assay }) => assay),
    ...replicatesOf(done).flatMap(({ combined }) => (combined ? [combined] : [])),
  ];
  if (assays.length > 0) process.stdout.write(formatted(documentOf(inUse, assays), options.format));
  if (assays.some((assay) => assay.state === 'withheld')) process.exitCode = 4;
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
}

export const documentOf = (inUse: CalibrationInUse, assays: AssayResult[]): AssayDocument => ({
  schema: 'tankhue/assay/1',
  calibration: { name: inUse.calibration.name, sha256: inUse.sha256 },
  assays,
});

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
export function assayOptionsOf(file: string | undefined): AssayOptions {
  if (file === undefined) return DEFAULT_ASSAY_OPTIONS;
  return optionsFromInstrument(readInstrumentRecord(new TextDecoder().decode(readFileBytes(file)), file), file);
}

export interface ReplicateGroup<Row extends SamplesRow> {
  readonly name: string;
  readonly members: readonly { readonly row: Row; readonly assay: AssayResult }[];
  readonly combined: AssayResult | null;
}

/** Cuvettes whose rows name the same sample in replicate_of (or are that sample) made into one result each. */
export function replicatesOf<Row extends SamplesRow>(
  done: readonly { row: Row; assay: AssayResult }[],
): ReplicateGroup<Row>[] {
  const names = new Set(
    done.flatMap(({ row }) => (row.replicateOf === null ? [] : [`${row.system}|${row.replicateOf}`])),
  );
  return [...names].map((key) => {
    const members = done.filter(({ row }) => `${row.system}|${row.replicateOf ?? row.name}` === key);
    const replicates = members.map(({ row, assay }) => ({
      assay,
      seconds: row.takenAt === null || row.scannedAt === null ? null : (row.scannedAt - row.takenAt) / 1000,
    }));
    const name = `${key.slice(key.indexOf('|') + 1)} (${members.length} cuvettes)`;
    return { name, members, combined: combineReplicates(name, replicates) };
  });
}

/** A row and its spectrum as the engine takes it. */
export function sampleOf(row: SamplesRow, shelf: SpectraShelf, sheet: string): Sample {
  const missing = row.blankExpected ? ('missing' as const) : ('instrument' as const);
  return { ...row, spectrum: shelf.spectrum(sheet, row), blank: row.blankFile === null ? missing : 'given' };
}
