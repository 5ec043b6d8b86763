import type { Command } from 'commander';
import {
  calibrate,
  calibrationReport,
  calibrationText,
  parseAssociation,
  parseCalibration,
  readStandardsSheet,
  serialiseCalibration,
  TankhueError,
  TankhueErrors,
  VERSION,
  type Association,
  type ReadOptions,
  type Standard,
} from '../index.ts';
import { readFileBytes, requireWritable, sha256Of, writeWhole } from '../io/files.ts';
import { SpectraShelf } from './inputs.ts';
import { collected, optionOf, readingOptions, readOptionsOf, tell } from './options.ts';
import { progressOn } from './progress.ts';
import { MADE_BY, writeReport } from './reportFile.ts';
import { parsePositive } from '../index.ts';

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
  format: 'text' | 'json';
}

const nanometres = (option: string) => optionOf(option, (text, where) => parsePositive(text, 'nm', where));

export function register(program: Command): void {
  const command = program
    .command('calibrate')
    .description('standards of known composition → a calibration file with its validation')
    .argument('[standards]', 'sheet of standards (CSV)')
    .option('--out <file>', 'calibration file to write (JSON)')
    .option('--inspect <file>', 'explain a calibration file instead of making one')
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
    .action((standards: string | undefined, options: CalibrateOptions) => run(command, standards, options));
  for (const option of readingOptions()) command.addOption(option);
}

async function run(command: Command, sheet: string | undefined, options: CalibrateOptions): Promise<void> {
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
  if (sheet === undefined || options.out === undefined)
    command.error('expected a sheet of standards and --out FILE.json (or --inspect FILE)');
  requireWritable(options.out, [sheet]);
  if (options.report !== undefined) requireWritable(options.report, [sheet, options.out]);
  const bytes = readFileBytes(sheet);
  const { rows, unknownColumns } = readStandardsSheet(bytes, sheet);
  if (unknownColumns.length > 0) tell(`${sheet}: columns kept but not used: ${unknownColumns.join(', ')}`);
  const shelf = new SpectraShelf(readOptionsOf(options), tell);
  const standards = withSpectra(sheet, rows, shelf);
  const bar = progressOn(process.stderr);
  const grid = {
    ...(options.from === undefined ? {} : { from: options.from }),
    ...(options.to === undefined ? {} : { to: options.to }),
    ...(options.step === undefined ? {} : { step: options.step }),
  };
  const calibration = calibrate(
    {
      name: options.name ?? sheet.replace(/^.*[\\/]/, '').replace(/\.[^.]*$/, ''),
      source: options.source,
      standards,
      without: options.without,
      associations: options.association,
      grid,
      ...(options.ceiling === undefined ? {} : { ceiling: options.ceiling }),
      matrix: matrixOf(rows),
      provenance: { tool: `tankhue ${VERSION}`, command: commandLine(sheet, options), sheetSha256: sha256Of(bytes) },
    },
    (pair, done) => bar.show(pair, done),
  );
  bar.stop();
  const file = serialiseCalibration(calibration);
  writeWhole(options.out, file, [sheet, ...shelf.paths]);
  process.stdout.write(options.format === 'json' ? file : calibrationText(calibration));
  if (options.report !== undefined)
    await writeReport(options.report, () => calibrationReport(calibration, sha256Of(file), MADE_BY), [
      sheet,
      options.out,
      ...shelf.paths,
    ]);
  tell(`written: ${options.out} (${Math.round(file.length / 1024)} kB, sha256 ${sha256Of(file).slice(0, 12)})`);
}

/** All files that cannot be read are shown at once. */
function withSpectra(
  sheet: string,
  rows: ReturnType<typeof readStandardsSheet>['rows'],
  shelf: SpectraShelf,
): Standard[] {
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

function matrixOf(rows: ReturnType<typeof readStandardsSheet>['rows']): {
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
function commandLine(sheet: string, options: CalibrateOptions): string {
  const name = sheet.replace(/^.*[\\/]/, '');
  const given = [
    ...options.without.map((standard) => `--without ${standard}`),
    ...options.association.map((association) => `--association ${association.name}`),
    ...(['from', 'to', 'step', 'ceiling', 'decimal', 'unit', 'axis', 'layout'] as const)
      .filter((key) => options[key] !== undefined)
      .map((key) => `--${key} ${options[key]}`),
  ];
  return ['tankhue calibrate', name, ...given].join(' ');
}
