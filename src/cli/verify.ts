import { dirname, isAbsolute, join } from 'node:path';
import type { Command } from 'commander';
import {
  absorbanceFromMilliabsorbance,
  benchReport,
  conformityPicture,
  findColumn,
  instrumentText,
  measurementModelOf,
  parseLength,
  parsePositive,
  readVerificationSheet,
  scansOfRows,
  verifyInstrument,
  DEFAULT_VERIFICATION,
  type ReadOptions,
  type SpectrumLoader,
  type VerificationOptions,
  type VerificationScans,
} from '../index.ts';
import { readFileBytes, writeWhole } from '../io/files.ts';
import { loadCalibration, SpectraShelf } from './inputs.ts';
import { optionOf, readingOptions, readOptionsOf, tell } from './options.ts';

interface VerifyOptions extends ReadOptions {
  test?: string;
  name: string;
  date: string;
  path?: number;
  concentration?: number;
  solution?: string;
  cell?: string;
  blank?: string;
  wavelengthLimit?: number;
  noiseLimit?: number;
  driftLimit?: number;
  flatnessLimit?: number;
  calibration?: string;
  out?: string;
  report?: string;
  format: 'text' | 'json';
}

export function register(program: Command): void {
  const command = program
    .command('verify')
    .description('scans of holmium, dichromate, cut-off solutions, cells and blanks → is the photometer fit for assays')
    .argument('<file...>', 'a sheet of scans (CSV with a column test), or files of spectra with --test')
    .option('--test <name>', 'what the files are: holmium, dichromate-perchloric, cut-off, empty-cell, blank …')
    .option('--path <length>', 'path of the cell, e.g. 10mm', optionOf('--path', parseLength))
    .option(
      '--concentration <c>',
      'of potassium dichromate, e.g. "60 mg/L"',
      optionOf('--concentration', (text, where) => parsePositive(text, 'mg/L', where)),
    )
    .option('--solution <name>', 'cut-off solution: potassium-chloride or sodium-nitrite')
    .option('--cell <name>', 'name of the cell under test')
    .option('--blank <file>', 'blank of the dichromate solution')
    .option('--name <name>', 'name of the photometer, for the record', '')
    .option('--date <date>', 'when it was checked, for the record, e.g. 2026-05-17', '')
    .option(
      '--wavelength-limit <nm>',
      'permitted error of every band, e.g. "0.5 nm"',
      limitIn('--wavelength-limit', 'nm'),
    )
    .option('--noise-limit <mA>', 'permitted noise of one point, e.g. "1 mA"', limitIn('--noise-limit', 'mA'))
    .option('--drift-limit <mA>', 'permitted drift in an hour, e.g. "2 mA"', limitIn('--drift-limit', 'mA'))
    .option(
      '--flatness-limit <mA>',
      'permitted departure of the baseline, e.g. "2 mA"',
      limitIn('--flatness-limit', 'mA'),
    )
    .option('--calibration <file>', 'what the faults mean for assays with this calibration; the shipped one without it')
    .option('--out <file>', 'write the record that later assays take with --instrument')
    .option('--report <file>', 'write text and picture as one HTML file')
    .option('--format <format>', 'text or json', 'text')
    .action((files: string[], options: VerifyOptions) => run(command, files, options));
  for (const option of readingOptions()) command.addOption(option);
}

const limitIn = (name: string, unit: string) => optionOf(name, (text, where) => parsePositive(text, unit, where));

function limitsOf({
  wavelengthLimit,
  noiseLimit,
  driftLimit,
  flatnessLimit,
}: VerifyOptions): VerificationOptions['limits'] {
  const { limits } = DEFAULT_VERIFICATION;
  const inAbsorbance = (milliabsorbance: number | undefined, usual: number) =>
    milliabsorbance === undefined ? usual : absorbanceFromMilliabsorbance(milliabsorbance);
  return {
    wavelength: wavelengthLimit ?? limits.wavelength,
    noise: inAbsorbance(noiseLimit, limits.noise),
    drift: inAbsorbance(driftLimit, limits.drift),
    flatness: inAbsorbance(flatnessLimit, limits.flatness),
  };
}

function run(command: Command, files: string[], options: VerifyOptions): void {
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
  if (options.test === undefined && files.length > 1)
    command.error('expected one sheet, or --test NAME to say what these spectra are');
  const shelf = new SpectraShelf(readOptionsOf(options), tell);
  const { scans, assumed, unknownColumns } =
    options.test === undefined ? scansOfSheet(files[0]!, shelf) : scansOfFiles(files, options.test, options, shelf);
  if (unknownColumns.length > 0) tell(`${files[0]}: columns kept but not used: ${unknownColumns.join(', ')}`);
  const { calibration } = loadCalibration(options.calibration);
  const record = verifyInstrument(
    scans,
    { instrument: options.name, checkedAt: options.date, assumed, limits: limitsOf(options) },
    calibration.pairs.map(measurementModelOf),
  );
  const json = `${JSON.stringify(record, null, 1)}\n`;
  const inputs = [...files, ...shelf.paths];
  if (options.out !== undefined) writeWhole(options.out, json, inputs);
  if (options.report !== undefined)
    writeWhole(
      options.report,
      benchReport('Check of the photometer', instrumentText(record), [conformityPicture(record)]),
      inputs,
    );
  process.stdout.write(options.format === 'json' ? json : instrumentText(record));
  if (record.state === 'failed') process.exitCode = 4;
}

function scansOfSheet(sheet: string, shelf: SpectraShelf): VerificationScans {
  const load: SpectrumLoader = (file, column, where) =>
    findColumn(shelf.file(isAbsolute(file) ? file : join(dirname(sheet), file)).spectra, column, where);
  return readVerificationSheet(readFileBytes(sheet), sheet, load);
}

/** Which option stands for which column of the sheet, for messages. */
const OPTION_OF: Readonly<Record<string, string>> = {
  test: '--test',
  path_mm: '--path',
  concentration_mg_L: '--concentration',
  solution: '--solution',
  cell: '--cell',
  blank_file: '--blank',
};

/** Every column of every file is a scan of the one test. */
function scansOfFiles(
  files: readonly string[],
  test: string,
  options: VerifyOptions,
  shelf: SpectraShelf,
): VerificationScans {
  const shared: [string, string | undefined][] = [
    ['test', test],
    ['path_mm', options.path === undefined ? undefined : String(10 * options.path)],
    ['concentration_mg_L', options.concentration?.toString()],
    ['solution', options.solution],
    ['cell', options.cell],
    ['blank_file', options.blank],
  ];
  const given = shared.filter((entry): entry is [string, string] => entry[1] !== undefined);
  const rows = files.flatMap((file) =>
    shelf.file(file).spectra.map(({ name }, i) => ({
      line: i + 1,
      cells: new Map([...given, ['file', file], ['column', name]]),
      where: (column: string) => OPTION_OF[column] ?? `a sheet with the column ${column}`,
    })),
  );
  const columns = [...given.map(([column]) => column), 'file', 'column'];
  return scansOfRows({ rows, columns, unknownColumns: [], decimalComma: false }, (file, column, where) =>
    findColumn(shelf.file(file).spectra, column, where),
  );
}
