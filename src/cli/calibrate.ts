import type { Command } from 'commander';
import {
  calibrate,
  calibrationReport,
  calibrationText,
  parseAssociation,
  parseCalibration,
  parsePositive,
  readStandardsSheet,
  extensionFindings,
  requireOldStandards,
  serialiseCalibration,
  transferCalibration,
  TankhueError,
  TankhueErrors,
  VERSION,
  type Association,
  type Calibration,
  type ReadOptions,
  type Standard,
  type StandardsRow,
} from '../index.ts';
import { readFileBytes, requireWritable, sha256Of, writeWhole } from '../io/files.ts';
import { SpectraShelf } from './inputs.ts';
import { collected, optionOf, readingOptions, readOptionsOf, tell } from './options.ts';
import { progressOn } from './progress.ts';
import { MADE_BY, writeReport } from './reportFile.ts';

interface CalibrateOptions extends ReadOptions {
  out?: string;
  name?: string;
  source: string;
  without: string[];
  association: Association[];
  from?: number;
  to?: number;
  step?: number;
  ceiling?: number;
  inspect?: string;
  report?: string;
  extend?: string;
  transfer?: string;
  format: 'text' | 'json';
}

const nanometres = (option: string) => optionOf(option, (text, where) => parsePositive(text, 'nm', where));

export function register(program: Command): void {
  const command = program
    .command('calibrate')
    .description('standards of known composition → a calibration file with its validation')
    .argument('[standards...]', 'sheets of standards (CSV)')
    .option('--out <file>', 'calibration file to write (JSON)')
    .option('--inspect <file>', 'explain a calibration file instead of making one')
    .option(
      '--extend <file>',
      'calibration that old and new standards together replace; its own standards must be among the sheets',
    )
    .option('--transfer <file>', 'calibration of another photometer to carry over by the few standards of the sheet')
    .option('--name <text>', 'name of the calibration')
    .option('--source <text>', 'where the standards came from, for the record', '')
    .option('--without <standard>', 'leave a standard out by decision; may be repeated', collected, [])
    .option(
      '--association <reactants>',
      'another complex to compare, e.g. V3+V4; may be repeated',
      (text, before: Association[]) => [...before, optionOf('--association', parseAssociation)(text)],
      [],
    )
    .option('--from <nm>', 'first wavelength, e.g. 430nm', nanometres('--from'))
    .option('--to <nm>', 'last wavelength', nanometres('--to'))
    .option('--step <nm>', 'width of the means', nanometres('--step'))
    .option(
      '--ceiling <A>',
      'absorbance above which points are not used',
      optionOf('--ceiling', (text, where) => parsePositive(text, 'A', where)),
    )
    .option('--report <file>', 'also write a report: one HTML file that carries the calibration')
    .option('--format <format>', 'text or json on stdout', 'text')
    .action((standards: string[], options: CalibrateOptions) => run(command, standards, options));
  for (const option of readingOptions()) command.addOption(option);
}

async function run(command: Command, sheets: readonly string[], options: CalibrateOptions): Promise<void> {
  if (options.inspect !== undefined) {
    const text = new TextDecoder().decode(readFileBytes(options.inspect));
    const calibration = parseCalibration(text, options.inspect);
    process.stdout.write(calibrationText(calibration));
    if (options.report !== undefined)
      await writeReport(options.report, () => calibrationReport(calibration, sha256Of(text), MADE_BY), [
        options.inspect,
      ]);
    return;
  }
  if (sheets.length === 0 || options.out === undefined)
    command.error('expected a sheet of standards and --out FILE.json (or --inspect FILE)');
  requireWritable(options.out, sheets);
  if (options.report !== undefined) requireWritable(options.report, [...sheets, options.out]);
  const shelf = new SpectraShelf(readOptionsOf(options), tell);
  const read = sheets.map((sheet) => readSheetOf(sheet, shelf));
  const standards = read.flatMap((one) => one.standards);
  const calibration =
    options.transfer === undefined
      ? calibrated(sheets, read, standards, options)
      : transferCalibration(calibrationIn(options.transfer), standards).calibration;
  const file = serialiseCalibration(calibration);
  writeWhole(options.out, file, [
    ...sheets,
    ...shelf.paths,
    ...[options.extend, options.transfer].filter((path) => path !== undefined),
  ]);
  process.stdout.write(options.format === 'json' ? file : calibrationText(calibration));
  if (options.report !== undefined)
    await writeReport(options.report, () => calibrationReport(calibration, sha256Of(file), MADE_BY), [
      ...sheets,
      options.out,
      ...shelf.paths,
    ]);
  tell(`written: ${options.out} (${Math.round(file.length / 1024)} kB, sha256 ${sha256Of(file).slice(0, 12)})`);
}

const calibrationIn = (path: string): Calibration =>
  parseCalibration(new TextDecoder().decode(readFileBytes(path)), path);

function readSheetOf(
  sheet: string,
  shelf: SpectraShelf,
): { bytes: Uint8Array; rows: StandardsRow[]; standards: Standard[] } {
  const bytes = readFileBytes(sheet);
  const { rows, unknownColumns } = readStandardsSheet(bytes, sheet);
  if (unknownColumns.length > 0) tell(`${sheet}: columns kept but not used: ${unknownColumns.join(', ')}`);
  return { bytes, rows, standards: withSpectra(sheet, rows, shelf) };
}

function calibrated(
  sheets: readonly string[],
  read: readonly { bytes: Uint8Array; rows: StandardsRow[] }[],
  standards: Standard[],
  options: CalibrateOptions,
): Calibration {
  const old = options.extend === undefined ? null : calibrationIn(options.extend);
  if (old) requireOldStandards(old, standards);
  const bar = progressOn(process.stderr);
  const grid = {
    ...(options.from === undefined ? {} : { from: options.from }),
    ...(options.to === undefined ? {} : { to: options.to }),
    ...(options.step === undefined ? {} : { step: options.step }),
  };
  const calibration = calibrate(
    {
      name: options.name ?? sheets[0]!.replace(/^.*[\\/]/, '').replace(/\.[^.]*$/, ''),
      source: options.source,
      standards,
      without: options.without,
      associations: options.association,
      grid,
      ...(options.ceiling === undefined ? {} : { ceiling: options.ceiling }),
      matrix: matrixOf(read.flatMap((one) => one.rows)),
      provenance: {
        tool: `tankhue ${VERSION}`,
        command: commandLine(sheets, options),
        sheetSha256:
          read.length === 1 ? sha256Of(read[0]!.bytes) : sha256Of(read.map((one) => sha256Of(one.bytes)).join('\n')),
      },
    },
    (pair, done) => bar.show(pair, done),
  );
  bar.stop();
  return old
    ? { ...calibration, findings: [...calibration.findings, ...extensionFindings(old, calibration)] }
    : calibration;
}

/** All files that cannot be read are shown at once. */
function withSpectra(sheet: string, rows: readonly StandardsRow[], shelf: SpectraShelf): Standard[] {
  const problems: TankhueError[] = [];
  const standards = rows.flatMap((row): Standard[] => {
    try {
      return [{ ...row, spectrum: shelf.spectrum(sheet, row) }];
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      if (!problems.includes(error)) problems.push(error);
      return [];
    }
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return standards;
}

function matrixOf(rows: readonly StandardsRow[]): {
  temperature: number | null;
  acid: number | null;
} {
  const mean = (values: (number | null)[]): number | null => {
    const known = values.filter((value) => value !== null);
    return known.length === 0 ? null : known.reduce((sum, value) => sum + value, 0) / known.length;
  };
  return { temperature: mean(rows.map((row) => row.temperature)), acid: mean(rows.map((row) => row.acid)) };
}

/** The options that matter for the result, without paths of this machine: the same command gives the same bytes. */
function commandLine(sheets: readonly string[], options: CalibrateOptions): string {
  const names = sheets.map((sheet) => sheet.replace(/^.*[\\/]/, ''));
  const given = [
    ...options.without.map((standard) => `--without ${standard}`),
    ...options.association.map((association) => `--association ${association.name}`),
    ...(['from', 'to', 'step', 'ceiling', 'decimal', 'unit', 'axis', 'layout'] as const)
      .filter((key) => options[key] !== undefined)
      .map((key) => `--${key} ${options[key]}`),
  ];
  return ['tankhue calibrate', ...names, ...given].join(' ');
}
