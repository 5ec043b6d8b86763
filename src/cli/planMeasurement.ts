import type { Command } from 'commander';
import {
  benchReport,
  DEFAULT_WISH,
  measurementMapPicture,
  dilutionBy,
  dilutionsFrom,
  MARKET_PATHS,
  marketCell,
  measurementModelOf,
  measurementPlanText,
  ONE_MARK_FLASKS,
  ONE_MARK_PIPETTES,
  PAIR_OF_SIDE,
  parseDilution,
  parseLength,
  parsePositive,
  parseSide,
  photometerTraits,
  planMeasurement,
  readInstrumentRecord,
  TankhueError,
  UNDILUTED,
  type CellAtHand,
  type DilutionAtHand,
  type InstrumentRecord,
  type Side,
} from '../index.ts';
import { readFileBytes, writeWhole } from '../io/files.ts';
import { loadCalibration } from './inputs.ts';
import { optionOf } from './options.ts';

interface PlanOptions {
  side: Side;
  total: number;
  charge: number;
  cells?: number[];
  dilutions?: number[];
  instrument?: string;
  ceiling?: number;
  wish: number;
  fillings: number;
  calibration?: string;
  out?: string;
  report?: string;
  format: 'text' | 'json';
}

export function register(plan: Command): void {
  const command = plan
    .command('measurement')
    .description('estimate of the sample, photometer, cells at hand → which cell, which dilution, how many fillings')
    .requiredOption('--side <side>', 'negative, positive or composite', optionOf('--side', parseSide))
    .option('--total <c>', 'total vanadium about, e.g. "1.6 mol/L"', numberIn('--total', 'mol/L'), 1.6)
    .option(
      '--charge <S>',
      'state of charge about, e.g. 50%; of a composite the share of V(IV)',
      numberIn('--charge', '%'),
      50,
    )
    .option(
      '--cells <list>',
      'cells at hand, e.g. 0.1mm,1mm,10mm; without it those of --instrument, else every path on the market',
      optionOf('--cells', listOf(parseLength)),
    )
    .option(
      '--dilutions <list>',
      'dilutions to consider, e.g. 1,5,20; without it what one pipetting makes',
      optionOf('--dilutions', listOf(parseDilution)),
    )
    .option('--instrument <file>', 'record of tankhue verify: noise, stray light, baseline, measured paths')
    .option('--ceiling <A>', 'absorbance above which points are not used', numberIn('--ceiling', 'A'))
    .option(
      '--wish <u>',
      'standard uncertainty of the state of charge wished for, e.g. "1 points"',
      numberIn('--wish', 'points'),
      100 * DEFAULT_WISH.stateOfCharge,
    )
    .option(
      '--fillings <n>',
      'most fillings anybody would make',
      numberIn('--fillings', 'fillings'),
      DEFAULT_WISH.mostFillings,
    )
    .option('--calibration <file>', 'calibration file; the shipped reference without it')
    .option('--out <file>', 'write the plan as JSON')
    .option('--report <file>', 'write text and map as one HTML file')
    .option('--format <format>', 'text or json', 'text')
    .action((options: PlanOptions) => run(command, options));
}

const listOf =
  <T>(parse: (text: string, where: string) => T) =>
  (text: string, where: string): T[] =>
    text.split(',').map((each) => parse(each, where));

const numberIn = (name: string, unit: string) => optionOf(name, (text, where) => parsePositive(text, unit, where));

function run(command: Command, options: PlanOptions): void {
  if (!['text', 'json'].includes(options.format))
    command.error(`expected --format text or json; received ${options.format}`);
  const { calibration } = loadCalibration(options.calibration);
  const pair = calibration.pairs.find((each) => each.pair === PAIR_OF_SIDE[options.side]);
  if (!pair)
    throw new TankhueError(
      'pair-missing',
      `expected a calibration for ${PAIR_OF_SIDE[options.side]}; received ${calibration.pairs.map((each) => each.pair).join(', ')}`,
      options.calibration ?? 'the shipped calibration',
      'calibrate that pair, or plan with the shipped calibration',
    );
  const record = options.instrument === undefined ? null : instrumentFrom(options.instrument);
  const result = planMeasurement(
    measurementModelOf(pair),
    { side: options.side, totalVanadium: options.total, stateOfCharge: options.charge / 100 },
    photometerTraits(record, pair.model.wavelength, options.ceiling),
    cellsFrom(options.cells, record),
    dilutionsOf(options.dilutions),
    { stateOfCharge: options.wish / 100, mostFillings: options.fillings },
  );
  const json = `${JSON.stringify(result, null, 1)}\n`;
  const inputs = [options.instrument, options.calibration].filter((each) => each !== undefined);
  if (options.out !== undefined) writeWhole(options.out, json, inputs);
  if (options.report !== undefined)
    writeWhole(
      options.report,
      benchReport('Plan of a measurement', measurementPlanText(result), [measurementMapPicture(result)]),
      inputs,
    );
  process.stdout.write(options.format === 'json' ? json : measurementPlanText(result));
  if (result.advice === null) process.exitCode = 4;
}

const instrumentFrom = (file: string): InstrumentRecord =>
  readInstrumentRecord(new TextDecoder().decode(readFileBytes(file)), file);

/** Cells of the list, with their measured path where the record has one of that name or length; else the record's own; else the market. */
function cellsFrom(paths: readonly number[] | undefined, record: InstrumentRecord | null): CellAtHand[] {
  const known = record?.cells ?? [];
  const measuredCell = ({ name, pathLength, uncertainty }: (typeof known)[number]): CellAtHand => ({
    ...marketCell(pathLength),
    name,
    pathUncertainty: uncertainty / pathLength,
  });
  if (paths !== undefined)
    return paths.map((pathLength) => {
      const near = known.find((cell) => Math.abs(cell.pathLength / pathLength - 1) < 0.1);
      return near ? measuredCell(near) : marketCell(pathLength);
    });
  return known.length > 0 ? known.map(measuredCell) : MARKET_PATHS.map(marketCell);
}

function dilutionsOf(factors: readonly number[] | undefined): DilutionAtHand[] {
  return factors?.map(dilutionBy) ?? [UNDILUTED, ...dilutionsFrom(ONE_MARK_PIPETTES, ONE_MARK_FLASKS)];
}
