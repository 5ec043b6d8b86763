import { dilutionBy, ONE_MARK_PIPETTES, volumeUncertainty } from '../bench/glassware.ts';
import { PRIMARY_STANDARDS, type PrimaryStandard } from '../bench/titration/course.ts';
import { OXIDANTS, TITRANTS, type Titrant } from '../bench/titration/couples.ts';
import { curveFromReadings, type Reading } from '../bench/titration/curve.ts';
import type { AddedReagent, TitrationRun } from '../bench/titration/titrationRun.ts';
import { PAIRS, parseSide, type Pair, type Side } from '../electrolyte/species.ts';
import { quoted, TankhueError, TankhueErrors } from '../errors.ts';
import { measured, sumOf, type Measured } from '../numerics/measured.ts';
import type { SpectrumOrigin } from '../spectrum/spectrum.ts';
import { kelvinFromCelsius } from '../units.ts';
import { nearest } from './nearest.ts';
import { readSheet, RowReader, type Sheet, type SheetRow } from './sheet.ts';
import { spectrumOfRow, SPECTRUM_COLUMNS } from './standardsSpectrum.ts';

/** What describes a run: on its first line, or in a sheet of its own with one line a run. */
export const TITRATION_RUN_COLUMNS = [
  'run',
  'task',
  'sample',
  'system',
  'side',
  'pair',
  'titrant',
  'normality_mol_L',
  'normality_u_mol_L',
  'aliquot_mL',
  'aliquot_u_mL',
  'dilution',
  'dilution_u',
  'iron_mL',
  'iron_u_mL',
  'iron_normality_mol_L',
  'iron_normality_u_mol_L',
  'oxidant',
  'oxidant_mL',
  'oxidant_u_mL',
  'oxidant_normality_mol_L',
  'oxidant_normality_u_mol_L',
  'standard',
  'standard_g',
  'standard_u_g',
  'standard_purity',
  'standard_purity_u',
  'blank_mL',
  'blank_u_mL',
  'burette_mL',
  'burette_u_mL',
  'reading_u_mL',
  'beaker_mL',
  'temperature_C',
  'check_before_mV',
  'check_after_mV',
  'inert_gas',
  'preparation',
  ...SPECTRUM_COLUMNS,
  'note',
] as const;

const READING_COLUMNS = ['volume_mL', 'potential_mV', 'potential_V'] as const;

/** What a sheet that says nothing is taken to mean; each is said in the result [common practice]. */
const USUAL = {
  temperature: 25,
  burette: 0.02,
  reading: 0.005,
  strength: 0.002,
  volume: 0.002,
  /** g: difference of two weighings, each within 0.15 mg (QUAM A2) */
  weighing: (0.00015 * Math.SQRT2) / Math.sqrt(3),
  /** ± 0.0005 rectangular (QUAM A2) */
  purity: 0.0005 / Math.sqrt(3),
  /** relative: water expands by 2.1e-4/K, the laboratory stays within 4 K (QUAM A1) */
  expansion: (2.1e-4 * 4) / Math.sqrt(3),
} as const;

/** A file of readings, and where it came from. */
export interface CurveFile {
  readonly bytes: Uint8Array;
  readonly origin: SpectrumOrigin;
}

/**
 * Titration curves with what describes them, from one or several files and, where the instrument's files hold readings only, a sheet of runs.
 * @throws TankhueErrors with every problem of all runs
 */
export function readTitrations(
  files: readonly CurveFile[],
  runsSheet: CurveFile | null,
): { runs: TitrationRun[]; unknownColumns: readonly string[] } {
  const described = runsSheet ? describedRuns(runsSheet) : null;
  const problems: TankhueError[] = [];
  const runs: TitrationRun[] = [];
  const unknown = new Set<string>(described?.sheet.unknownColumns ?? []);
  for (const file of files) {
    const sheet = readSheet(
      file.bytes,
      file.origin.file,
      [...READING_COLUMNS, ...TITRATION_RUN_COLUMNS],
      ['volume_mL'],
    );
    sheet.unknownColumns.forEach((column) => unknown.add(column));
    requirePotential(sheet, file.origin.file);
    for (const { name, rows } of runsOf(sheet, nameOf(file.origin.file))) {
      try {
        runs.push(readRun(name, rows, sheet, described?.rows.get(name) ?? null, file.origin));
      } catch (error) {
        if (error instanceof TankhueErrors) problems.push(...error.all);
        else if (error instanceof TankhueError) problems.push(error);
        else throw error;
      }
    }
  }
  const repeated = runs.find((run, i) => runs.findIndex((other) => other.run === run.run) !== i);
  if (repeated)
    problems.push(
      new TankhueError(
        'name-repeats',
        `expected every run to have a name of its own; received ${quoted(repeated.run)} twice`,
        repeated.where,
        'number the runs: A-1, A-2',
      ),
    );
  for (const [name, row] of described?.rows ?? [])
    if (!runs.some((run) => run.run === name) && problems.length === 0)
      problems.push(
        new TankhueError(
          'run-unknown',
          `expected readings for run ${quoted(name)}; received none`,
          row.where('run'),
          `write the name the curve file uses: ${runs.map(({ run }) => run).join(', ')}`,
        ),
      );
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { runs, unknownColumns: [...unknown] };
}

/** File name without folder and ending: the run of a file that has no column for it. */
const nameOf = (file: string): string => file.replace(/^.*[/\\]/, '').replace(/\.[^.]*$/, '');

function describedRuns(file: CurveFile): { sheet: Sheet; rows: Map<string, SheetRow> } {
  const sheet = readSheet(file.bytes, file.origin.file, TITRATION_RUN_COLUMNS, ['run']);
  return { sheet, rows: new Map(sheet.rows.map((row) => [row.cells.get('run') ?? '', row])) };
}

function requirePotential(sheet: Sheet, file: string): void {
  const has = ['potential_mV', 'potential_V'].filter((column) => sheet.columns.includes(column));
  if (has.length === 1) return;
  throw new TankhueError(
    has.length === 0 ? 'column-missing' : 'column-repeats',
    `expected one column potential_mV or potential_V; received ${has.length === 0 ? sheet.columns.filter(Boolean).join(', ') : 'both'}`,
    file,
    'name the column of the readings after their unit',
  );
}

/** Lines by run; an empty cell belongs to the run above it. */
function runsOf(sheet: Sheet, fallback: string): { name: string; rows: SheetRow[] }[] {
  const runs = new Map<string, SheetRow[]>();
  let name = fallback;
  for (const row of sheet.rows) {
    name = row.cells.get('run') || name;
    runs.set(name, [...(runs.get(name) ?? []), row]);
  }
  return [...runs].map(([name, rows]) => ({ name, rows }));
}

/** What the lines of one run say about it, as one row; two different words in one column are refused. */
function mergedRow(rows: readonly SheetRow[], described: SheetRow | null, problems: TankhueError[]): SheetRow {
  const all = described ? [described, ...rows] : rows;
  const cells = new Map<string, string>();
  const home = new Map<string, SheetRow>();
  for (const row of all)
    for (const column of TITRATION_RUN_COLUMNS) {
      const text = row.cells.get(column);
      if (!text) continue;
      const known = cells.get(column);
      if (known !== undefined && known !== text)
        problems.push(
          new TankhueError(
            'run-differs',
            `expected one ${column} for the whole run; received ${quoted(known)} and ${quoted(text)}`,
            row.where(column),
            'write it on the first line of the run, or name the runs apart',
          ),
        );
      else if (known === undefined) {
        cells.set(column, text);
        home.set(column, row);
      }
    }
  return { line: all[0]!.line, cells, where: (column) => (home.get(column) ?? all[0]!).where(column) };
}

function readRun(
  name: string,
  rows: readonly SheetRow[],
  sheet: Sheet,
  described: SheetRow | null,
  origin: SpectrumOrigin,
): TitrationRun {
  const problems: TankhueError[] = [];
  const row = mergedRow(rows, described, problems);
  const read = new RowReader(row, sheet.decimalComma);
  const assumed: string[] = [];
  const run = new RunCells(read, assumed, name, `${origin.file}:${row.line}`);
  const result = run.titration(curveOf(name, rows, sheet, problems), origin);
  problems.push(...read.problems);
  if (problems.length > 0 || result === null) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return result;
}

function curveOf(
  name: string,
  rows: readonly SheetRow[],
  sheet: Sheet,
  problems: TankhueError[],
): ReturnType<typeof curveFromReadings> | null {
  const inVolts = sheet.columns.includes('potential_V');
  const readings: Reading[] = [];
  for (const row of rows) {
    const read = new RowReader(row, sheet.decimalComma);
    const volume = read.number('volume_mL');
    const potential = read.number(inVolts ? 'potential_V' : 'potential_mV');
    problems.push(...read.problems);
    if (volume === null || potential === null) continue;
    readings.push({ volume, potential: inVolts ? 1000 * potential : potential, where: row.where('volume_mL') });
  }
  try {
    return curveFromReadings(name, readings);
  } catch (error) {
    if (!(error instanceof TankhueErrors)) throw error;
    problems.push(...error.all);
    return null;
  }
}

/** Typed cells of one run, with what is taken for granted where a cell is empty. */
class RunCells {
  private readonly read: RowReader;
  private readonly assumed: string[];
  private readonly name: string;
  private readonly where: string;

  constructor(read: RowReader, assumed: string[], name: string, where: string) {
    this.read = read;
    this.assumed = assumed;
    this.name = name;
    this.where = where;
  }

  titration(curve: ReturnType<typeof curveFromReadings> | null, origin: SpectrumOrigin): TitrationRun | null {
    const titrant = this.word('titrant', TITRANTS, null);
    const task = this.word(
      'task',
      ['sample', 'standardisation', 'blank'] as const,
      this.read.text('standard') ? 'standardisation' : 'sample',
    );
    const common = this.common(origin);
    // Cells are read even where the titrant is not: all problems of a run at once.
    const details =
      task === 'sample' ? this.sample(titrant ?? 'cerium') : task === 'standardisation' ? this.standardisation() : {};
    if (task === null || titrant === null) return null;
    if (details === null || curve === null) return null;
    if (curve.repeats > 0) this.assumed.push(`of ${curve.repeats} readings repeated at a volume the last one counts`);
    return {
      ...common,
      ...details,
      run: this.name,
      task,
      titrant,
      curve: curve.curve,
      where: this.where,
    } as TitrationRun;
  }

  private common(origin: SpectrumOrigin) {
    const { read } = this;
    const celsius = read.number('temperature_C', (t) => t > 0 && t < 100, '0 to 100 °C');
    if (celsius === null) this.assumed.push(`${USUAL.temperature} °C in the beaker`);
    const beaker = read.number('beaker_mL', isAbove0, 'a volume above 0 mL');
    if (beaker === null)
      this.assumed.push('some 100 mL in the beaker at the start (50 to 200): the acid thins out as titrant comes in');
    const before = read.number('check_before_mV');
    const after = read.number('check_after_mV');
    const burette = read.number('burette_u_mL', isAbove0, 'an uncertainty above 0 mL');
    if (burette === null)
      this.assumed.push(`volumes of the burette known to ${USUAL.burette} mL (common practice, no source)`);
    const reading = read.number('reading_u_mL', isAbove0, 'an uncertainty above 0 mL');
    const blank = read.number('blank_mL', (v) => v >= 0, '0 mL or more');
    const blankU = read.number('blank_u_mL', (v) => v >= 0, '0 mL or more');
    if (blank !== null) this.assumed.push('what the reagents use up is used up before the last end point');
    const temperature = kelvinFromCelsius(celsius ?? USUAL.temperature);
    return {
      cell: {
        temperature,
        beakerVolume: beaker,
        driftSeen: before === null || after === null ? null : after - before,
        readingUncertainty: reading ?? USUAL.reading,
      },
      buretteUncertainty: burette ?? USUAL.burette,
      buretteVolume: read.number('burette_mL', isAbove0, 'a volume above 0 mL'),
      blank: blank === null ? null : measured(blank, blankU ?? USUAL.burette, `blank:${this.name}`),
      assumed: this.assumed,
      origin,
    };
  }

  private sample(titrant: Titrant) {
    const { read } = this;
    const pair = this.pair();
    const aliquot = this.pipetted('aliquot', true);
    if (pair === undefined || aliquot === null) return null;
    const sideText = read.text('side');
    const side = sideText === null ? sideOf(pair) : this.tried('side', () => parseSide(sideText, read.where('side')));
    const dilution = read.number('dilution', (d) => d >= 1, 'a dilution of 1 or more') ?? 1;
    const dilutionU = read.number('dilution_u', (u) => u >= 0, '0 or more');
    const byGlass = dilutionBy(dilution);
    if (dilutionU === null && dilution > 1)
      this.assumed.push(
        `dilution ${dilution} known to ${(100 * byGlass.uncertainty).toFixed(2)} %${byGlass.glassware ? ` (${byGlass.glassware}, class A)` : ''}`,
      );
    const sample = read.text('sample') ?? this.name;
    const celsius = read.number('temperature_C');
    const oxidant = this.word('oxidant', OXIDANTS, undefined);
    const added = this.reagent('oxidant', oxidant ?? null);
    return {
      sample,
      system: read.text('system') ?? '',
      side,
      pair,
      strength: this.strength('normality', titrant),
      aliquot: sumOf(aliquot, measured(0, USUAL.expansion * aliquot.value, 'temperature of the glassware:all')),
      dilution: measured(dilution, dilutionU ?? dilution * byGlass.uncertainty, `dilution:${sample}`),
      iron: this.reagent('iron', 'iron'),
      oxidant: added && oxidant ? { ...added, kind: oxidant } : null,
      inertGas: read.flag('inert_gas'),
      preparation: read.text('preparation') ?? sample,
      temperature: celsius === null ? null : kelvinFromCelsius(celsius),
      spectrum: spectrumOfRow(read),
    };
  }

  private standardisation() {
    const standard: PrimaryStandard | null = this.word('standard', PRIMARY_STANDARDS, null);
    const mass = this.needed('standard_g', 'the mass of the standard');
    const massU = this.read.number('standard_u_g', isAbove0, 'an uncertainty above 0 g');
    const purity = this.read.number('standard_purity', (p) => p > 0.5 && p <= 1.02, 'a mass fraction up to 1');
    const purityU = this.read.number(
      'standard_purity_u',
      (u) => u >= 0 && u < 0.1,
      'an uncertainty of a mass fraction',
    );
    if (standard === null || mass === null) return null;
    if (massU === null) this.assumed.push('standards weighed by difference on a balance good to 0.15 mg');
    if (purityU === null) this.assumed.push('purity of the standard within 0.0005 of what is stated');
    return {
      standard,
      mass: measured(mass, massU ?? USUAL.weighing, `weighing:${this.name}`),
      purity: measured(purity ?? 1, purityU ?? USUAL.purity, `purity:${standard}`),
    };
  }

  private strength(column: 'normality' | 'iron_normality' | 'oxidant_normality', of: Titrant): Measured | null {
    const value = this.read.number(`${column}_mol_L`, isAbove0, 'a strength above 0 mol/L');
    const u = this.read.number(`${column}_u_mol_L`, isAbove0, 'an uncertainty above 0 mol/L');
    if (value === null) return null;
    if (u === null)
      this.assumed.push(`strength of ${of} known to ${100 * USUAL.strength} % (common practice, no source)`);
    return measured(value, u ?? USUAL.strength * value, `strength of ${of}:${value}`);
  }

  private reagent(column: 'iron' | 'oxidant', kind: Titrant | null): AddedReagent | null {
    const volume = this.pipetted(column, false);
    if (volume === null) {
      if (column === 'oxidant' && kind) this.needed('oxidant_mL', 'the volume of oxidant added');
      return null;
    }
    if (kind === null) {
      this.word('oxidant', OXIDANTS, null);
      return null;
    }
    return { volume, strength: this.strength(`${column}_normality`, kind) };
  }

  /** A pipetted volume; without an uncertainty that of a class A pipette of this size, else 0.2 %. */
  private pipetted(column: 'aliquot' | 'iron' | 'oxidant', isNeeded: boolean): Measured | null {
    const value = isNeeded
      ? this.needed(`${column}_mL`, 'the volume of sample pipetted in')
      : this.read.number(`${column}_mL`, isAbove0, 'a volume above 0 mL');
    const u = this.read.number(`${column}_u_mL`, isAbove0, 'an uncertainty above 0 mL');
    if (value === null) return null;
    const pipette = ONE_MARK_PIPETTES.find(({ volume }) => volume === value);
    if (u === null)
      this.assumed.push(
        pipette
          ? `${column} by a one-mark pipette of class A, ± ${pipette.tolerance} mL`
          : `${column} known to ${100 * USUAL.volume} % (common practice, no source)`,
      );
    return measured(
      value,
      u ?? (pipette ? volumeUncertainty(pipette) : USUAL.volume * value),
      `${column}:${value} mL pipette`,
    );
  }

  /** undefined where the cell is wrong; null for total vanadium alone. */
  private pair(): Pair | null | undefined {
    const text = this.read.text('pair');
    const plain = text
      ?.toUpperCase()
      .replaceAll(/[\s()]/g, '')
      .replace(/^V?(II|III|IV)\/V?(III|IV|V)$/, (_, a: string, b: string) => `V${ROMAN[a]}/V${ROMAN[b]}`);
    if (plain === 'TOTAL') return null;
    const pair = PAIRS.find((one) => one === plain);
    if (pair) return pair;
    this.read.refuse(
      'pair-unknown',
      'pair',
      `expected pair to be ${PAIRS.join(', ')} or total; received ${text === null ? 'an empty cell' : quoted(text)}`,
      'write the two states the sample holds: negative V2/V3, positive V4/V5, both mixed V3/V4',
    );
    return undefined;
  }

  private word<Word extends string, Default extends Word | null | undefined>(
    column: string,
    words: readonly Word[],
    fallback: Default,
  ): Word | Default {
    const text = this.read.text(column);
    if (text === null && fallback !== null) return fallback;
    const found = words.find((word) => word === text?.toLowerCase().replaceAll(/[\s_]+/g, '-'));
    if (found) return found;
    const near = text === null ? null : nearest(text.toLowerCase(), words);
    this.read.refuse(
      'word-unknown',
      column,
      `expected ${column} to be ${words.join(', ')}; received ${text === null ? 'an empty cell' : quoted(text)}`,
      near ? `did you mean ${near}?` : 'write it on the first line of the run',
    );
    return fallback;
  }

  private needed(column: string, what: string): number | null {
    const value = this.read.number(column, isAbove0, `${what}, above 0`);
    if (value === null && this.read.text(column) === null)
      this.read.refuse(
        'cell-empty',
        column,
        `expected ${what} in ${column} for run ${quoted(this.name)}; received an empty cell`,
        'write it on the first line of the run',
      );
    return value;
  }

  private tried<T>(column: string, parse: () => T): T | null {
    try {
      return parse();
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      this.read.refuse(error.code, column, error.message, error.hint);
      return null;
    }
  }
}

const ROMAN: Readonly<Record<string, number>> = { II: 2, III: 3, IV: 4, V: 5 };
const isAbove0 = (value: number): boolean => value > 0;

const sideOf = (pair: Pair | null): Side =>
  pair === 'V2/V3' ? 'negative' : pair === 'V4/V5' ? 'positive' : 'composite';
