import type { Command } from 'commander';
import {
  assaySample,
  balanceCsv,
  balancePlant,
  balanceText,
  plantFromAssays,
  readTanksSheet,
  TankhueError,
  TankhueErrors,
  type AssayResult,
  type BalanceDocument,
  type ReadOptions,
  type TanksRow,
} from '../index.ts';
import { readFileBytes } from '../io/files.ts';
import { assayOptionsOf, replicatesOf, sampleOf } from './assay.ts';
import { loadCalibration, SpectraShelf } from './inputs.ts';
import { readingOptions, readOptionsOf, tell } from './options.ts';

interface BalanceOptions extends ReadOptions {
  calibration?: string;
  instrument?: string;
  format: 'text' | 'json' | 'csv';
}

export function register(program: Command): void {
  const command = program
    .command('balance')
    .description('two tanks → in balance or not, why, and what puts it right')
    .argument('<tanks>', 'sheet of tanks (CSV)')
    .option('--calibration <file>', 'calibration file; without it the shipped reference is used')
    .option('--instrument <file>', 'record of the photometer from tankhue verify: sets priors and ceiling')
    .option('--format <format>', 'text, json or csv', 'text')
    .action((sheet: string, options: BalanceOptions) => run(command, sheet, options));
  for (const option of readingOptions()) command.addOption(option);
}

function run(command: Command, sheet: string, options: BalanceOptions): void {
  if (!['text', 'json', 'csv'].includes(options.format))
    command.error(`expected --format text, json or csv; received ${options.format}`);
  const inUse = loadCalibration(options.calibration);
  const shelf = new SpectraShelf(readOptionsOf(options), options.format === 'text' ? () => {} : tell);
  const read = readTanksSheet(readFileBytes(sheet), sheet);
  const problems: TankhueError[] = [...read.problems];
  if (read.unknownColumns.length > 0) tell(`${sheet}: columns kept but not used: ${read.unknownColumns.join(', ')}`);
  const assayOptions = assayOptionsOf(options.instrument);
  const done: Cuvette[] = [];
  for (const row of read.rows) {
    try {
      done.push({ assay: assaySample(sampleOf(row, shelf, sheet), inUse, assayOptions), row });
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      problems.push(error);
    }
  }
  const bySystem = new Map<string, { assay: AssayResult; details: TanksRow }[]>(
    read.rows.map((row) => [row.system, []]),
  );
  for (const { assay, row } of withReplicatesCombined(done)) bySystem.get(row.system)!.push({ assay, details: row });
  const document: BalanceDocument = {
    schema: 'tankhue/balance/1',
    calibration: { name: inUse.calibration.name, sha256: inUse.sha256 },
    systems: [...bySystem].map(([system, cuvettes]) => balancePlant(plantFromAssays(system, cuvettes))),
  };
  if (document.systems.length > 0) process.stdout.write(formatted(document, options.format));
  const withheld = [...bySystem.values()].flat().some(({ assay }) => assay.state === 'withheld');
  if (withheld) process.exitCode = 4;
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
}

interface Cuvette {
  readonly row: TanksRow;
  readonly assay: AssayResult;
}

/** Fillings of one sample become one cuvette; what cannot be combined stays apart. */
function withReplicatesCombined(done: readonly Cuvette[]): Cuvette[] {
  const groups = replicatesOf(done).filter((group) => group.combined !== null);
  const grouped = new Set(groups.flatMap((group) => group.members));
  return [
    ...done.filter((cuvette) => !grouped.has(cuvette)),
    ...groups.map((group) => ({ row: group.members[0]!.row, assay: group.combined! })),
  ];
}

function formatted(document: BalanceDocument, format: BalanceOptions['format']): string {
  if (format === 'json') return `${JSON.stringify(document, null, 1)}\n`;
  return format === 'csv' ? balanceCsv(document) : balanceText(document);
}
