import {
  assayDocumentOf,
  assayRows,
  balanceDocumentOf,
  calibrate,
  DEFAULT_ASSAY_OPTIONS,
  findColumn,
  parseCalibration,
  parseDilution,
  parseLength,
  parseSide,
  parseSpectraChunks,
  readBack,
  readSamplesSheet,
  readSheet,
  readStandardsSheet,
  readTanksSheet,
  serialiseCalibration,
  subtractBlank,
  TankhueError,
  TankhueErrors,
  TANKS_COLUMNS,
  understoodText,
  VERSION,
  withHash,
  type CalibrationInUse,
  type SamplesRow,
  type Spectrum,
  type SpectraRead,
  type Standard,
} from '../index.ts';
import { demoPlant } from './demoPlants.ts';
import { REFERENCE_NAME, type FileRead, type Problem, type Requests, type SeriesRequest } from './protocol.ts';

type Answer<Name extends keyof Requests> = Promise<Requests[Name]['out']> | Requests[Name]['out'];
type Progress = (done: number) => void;

const SHEET_NAME = 'sheet';
const CHUNK = 1 << 19;

/** The files of a bench and what is computed from them. Lives in the worker. */
export class Engine {
  private readonly spectra = new Map<string, SpectraRead>();
  private readonly calibrations = new Map<string, CalibrationInUse>();
  private readonly reference: string;

  /** @param reference text of the calibration that ships */
  constructor(reference: string) {
    this.reference = reference;
  }

  async read({ name, bytes, options }: Requests['read']['in'], progress: Progress): Promise<FileRead> {
    const sha256 = await sha256Of(bytes);
    const nothing = { name, columns: [], sha256, problems: [] };
    try {
      const kind = kindOf(bytes);
      if (kind === 'calibration') return await this.readCalibration(name, bytes, sha256);
      if (kind === 'report') {
        const text = await readBack(new TextDecoder().decode(bytes), name);
        return { ...nothing, kind, understood: 'a report of tankhue with its record', text };
      }
      if (kind === 'record')
        return {
          ...nothing,
          kind,
          understood: 'a record of results (JSON)',
          text: new TextDecoder().decode(bytes),
        };
      if (kind === 'tanks-sheet') {
        const { rows, columns, unknownColumns } = readSheet(bytes, name, TANKS_COLUMNS, ['file']);
        const unused = unknownColumns.length > 0 ? `; columns kept but not used: ${unknownColumns.join(', ')}` : '';
        return {
          ...nothing,
          kind,
          understood: `a sheet of ${rows.length} rows with ${columns.length} columns${unused}`,
          rows: rows.map(({ cells }) => Object.fromEntries(cells)),
        };
      }
      if (kind === 'standards-sheet') {
        const { rows } = readStandardsSheet(bytes, name);
        return {
          ...nothing,
          kind,
          understood: `a sheet of ${rows.length} standards`,
          text: new TextDecoder().decode(bytes),
          rows: rows.map(({ name: standard, file }) => ({ standard, file })),
        };
      }
      const read = withHash(parseSpectraChunks(inChunks(bytes, progress), name, options), sha256);
      this.spectra.set(name, read);
      return {
        ...nothing,
        kind: 'spectra',
        understood: understoodText(name, read.understood),
        columns: read.spectra.map((spectrum) => spectrum.name),
      };
    } catch (error) {
      this.spectra.delete(name);
      return { ...nothing, kind: 'unreadable', understood: '', problems: problemsOf(error) };
    }
  }

  private async readCalibration(name: string, bytes: Uint8Array, sha256: string): Promise<FileRead> {
    const text = new TextDecoder().decode(bytes);
    const calibration = parseCalibration(text, name);
    const isReference = sha256 === (await this.inUse(REFERENCE_NAME)).sha256;
    this.calibrations.set(name, { calibration, sha256, isReference });
    const understood = `a calibration of ${calibration.pairs.map(({ pair }) => pair).join(', ')} from ${calibration.standards.length} standards`;
    return { name, kind: 'calibration', understood, columns: [], sha256, problems: [], text };
  }

  forget({ name }: Requests['forget']['in']): null {
    this.spectra.delete(name);
    this.calibrations.delete(name);
    return null;
  }

  private async inUse(name: string): Promise<CalibrationInUse> {
    const known = this.calibrations.get(name);
    if (known) return known;
    if (name !== REFERENCE_NAME)
      throw new TankhueError(
        'calibration-not-here',
        `expected a calibration that was dropped; received "${name}"`,
        'calibration',
        'drop the calibration file again, or choose the shipped reference',
      );
    const calibration = parseCalibration(this.reference, REFERENCE_NAME);
    const sha256 = await sha256Of(new TextEncoder().encode(this.reference));
    const reference = { calibration, sha256, isReference: true };
    this.calibrations.set(REFERENCE_NAME, reference);
    return reference;
  }

  /** Both tanks from the typed sheet; the balance where every tank has a volume, the assays in any case. */
  async compute({ sheet, calibration }: Requests['compute']['in']): Promise<Requests['compute']['out']> {
    const columns = sheet.split('\n', 1)[0]!.split(',');
    try {
      const inUse = await this.inUse(calibration);
      const bytes = new TextEncoder().encode(sheet);
      const tanks = readTanksSheet(bytes, SHEET_NAME);
      const lacksVolume = tanks.problems.some(({ code }) => code === 'volume-unknown');
      const { rows, problems } = lacksVolume ? readSamplesSheet(bytes, SHEET_NAME) : tanks;
      const { cuvettes, problems: unread } = assayRows<SamplesRow>(
        rows,
        (row) => this.spectrumOf(row),
        inUse,
        DEFAULT_ASSAY_OPTIONS,
      );
      const balance = lacksVolume
        ? null
        : balanceDocumentOf(
            inUse,
            tanks.rows,
            cuvettes.map(({ assay, row }) => ({ assay, row: tanks.rows[rows.indexOf(row)]! })),
          );
      return {
        balance: cuvettes.length > 0 ? balance : null,
        assays: cuvettes.length > 0 ? assayDocumentOf(inUse, cuvettes) : null,
        problems: [...problems, ...unread, ...(lacksVolume ? tanks.problems : [])]
          .flatMap((problem) => problemsOf(problem, columns))
          .filter(isFirstOfItsKind),
        rowOfAssay: cuvettes.map(({ row }) => rowIndex(row.where)!),
      };
    } catch (error) {
      return { balance: null, assays: null, problems: problemsOf(error, columns), rowOfAssay: [] };
    }
  }

  private spectrumOf(row: {
    file: string;
    column: string | null;
    blankFile: string | null;
    blankColumn: string | null;
    where: string;
  }): Spectrum {
    const sample = findColumn(this.spectraOf(row.file, row.where), row.column, row.where);
    if (row.blankFile === null) return sample;
    const blank = findColumn(this.spectraOf(row.blankFile, row.where), row.blankColumn, row.where);
    return subtractBlank(sample, blank).spectrum;
  }

  private spectraOf(file: string, where: string): readonly Spectrum[] {
    const read = this.spectra.get(file) ?? this.spectra.get(file.replace(/^.*[\\/]/, ''));
    if (read) return read.spectra;
    throw new TankhueError(
      'file-not-here',
      `expected a file that was dropped; received "${file}"`,
      where,
      'drop the file on the page, or choose one of those above',
    );
  }

  async inspect({ calibration }: Requests['inspect']['in']): Promise<Requests['inspect']['out']> {
    const { calibration: found, sha256 } = await this.inUse(calibration);
    return { calibration: found, sha256 };
  }

  async build({ sheet, name }: Requests['build']['in'], progress: Progress): Promise<Requests['build']['out']> {
    try {
      const bytes = new TextEncoder().encode(sheet);
      const { rows } = readStandardsSheet(bytes, name);
      const problems: TankhueError[] = [];
      const standards = rows.flatMap((row): Standard[] => {
        try {
          return [{ ...row, spectrum: this.spectrumOf(row) }];
        } catch (error) {
          if (!(error instanceof TankhueError)) throw error;
          problems.push(error);
          return [];
        }
      });
      if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
      const done = new Map<string, number>();
      const calibration = calibrate(
        {
          name: name.replace(/\.[^.]*$/, ''),
          source: '',
          standards,
          provenance: {
            tool: `tankhue ${VERSION}`,
            command: `the page, ${name}`,
            sheetSha256: await sha256Of(bytes),
          },
        },
        (pair, share) => {
          done.set(pair, share);
          progress([...done.values()].reduce((sum, one) => sum + one, 0) / 3);
        },
      );
      const text = serialiseCalibration(calibration);
      return { text, calibration, sha256: await sha256Of(new TextEncoder().encode(text)), problems: [] };
    } catch (error) {
      return { text: '', calibration: null, sha256: '', problems: problemsOf(error) };
    }
  }

  /** Every spectrum of one file as samples of one side. */
  async series(request: SeriesRequest, progress: Progress): Promise<Requests['series']['out']> {
    try {
      const inUse = await this.inUse(request.calibration);
      const side = parseSide(request.side, 'side');
      const pathLength = request.path.trim() === '' ? null : parseLength(`${request.path}mm`, 'path');
      const dilution = parseDilution(request.dilution || '1', 'dilution');
      const spectra = this.spectraOf(request.file, request.file);
      const columns = new Map(spectra.map((spectrum) => [spectrum.name, spectrum]));
      const rows = spectra.map(({ name }, i): SamplesRow => ({
        name,
        system: '',
        side,
        file: request.file,
        column: name,
        blankFile: null,
        blankColumn: null,
        blankExpected: false,
        pathLength,
        pathUncertainty: null,
        dilution,
        dilutionUncertainty: null,
        temperature: null,
        acid: null,
        takenAt: null,
        scannedAt: null,
        inertGas: null,
        replicateOf: null,
        cell: null,
        flask: null,
        note: null,
        where: `${request.file}:${i + 1}`,
      }));
      let count = 0;
      const { cuvettes, problems } = assayRows(
        rows,
        (row) => {
          count += 1;
          if (count % 25 === 0) progress(count / rows.length);
          return columns.get(row.column!)!;
        },
        inUse,
        { ...DEFAULT_ASSAY_OPTIONS, keepCurves: false },
      );
      return {
        assays: cuvettes.length > 0 ? assayDocumentOf(inUse, cuvettes) : null,
        problems: problems.slice(0, 20).flatMap((problem) => problemsOf(problem)),
      };
    } catch (error) {
      return { assays: null, problems: problemsOf(error) };
    }
  }

  async demo({ plant }: Requests['demo']['in']): Promise<Requests['demo']['out']> {
    return demoPlant(plant, (await this.inUse(REFERENCE_NAME)).calibration);
  }

  /** Answers one request by its name. */
  answer<Name extends keyof Requests>(name: Name, body: Requests[Name]['in'], progress: Progress): Answer<Name> {
    const methods: { [Key in keyof Requests]: (body: Requests[Key]['in'], progress: Progress) => Answer<Key> } = {
      read: (request, tell) => this.read(request, tell),
      forget: (request) => this.forget(request),
      compute: (request) => this.compute(request),
      inspect: (request) => this.inspect(request),
      build: (request, tell) => this.build(request, tell),
      series: (request, tell) => this.series(request, tell),
      demo: (request) => this.demo(request),
    };
    return methods[name](body, progress);
  }
}

/** What a file is, from its first characters. */
function kindOf(
  bytes: Uint8Array,
): 'spectra' | 'tanks-sheet' | 'standards-sheet' | 'calibration' | 'report' | 'record' {
  const head = new TextDecoder().decode(bytes.subarray(0, 4096)).trimStart();
  if (/^<!doctype html/i.test(head)) return 'report';
  if (head.startsWith('{')) return /"schema"\s*:\s*"tankhue\/(assay|balance)\/1"/.test(head) ? 'record' : 'calibration';
  const cells = (head.split(/\r\n|\n|\r/)[0] ?? '').split(/[,;\t]/).map((cell) => cell.trim().replaceAll('"', ''));
  const has = (...names: readonly string[]): boolean => names.every((name) => cells.includes(name));
  if (has('standard', 'file')) return 'standards-sheet';
  return has('sample', 'side') || has('sample', 'file') ? 'tanks-sheet' : 'spectra';
}

function* inChunks(bytes: Uint8Array, progress: Progress): Generator<Uint8Array> {
  for (let start = 0; start < bytes.length || start === 0; start += CHUNK) {
    progress(start / Math.max(1, bytes.length));
    yield bytes.subarray(start, start + CHUNK);
  }
}

async function sha256Of(bytes: Uint8Array): Promise<string> {
  const digest = await crypto.subtle.digest('SHA-256', bytes as BufferSource);
  return Array.from(new Uint8Array(digest), (byte) => byte.toString(16).padStart(2, '0')).join('');
}

/** `sheet:3:4` → row 1 (from 0, the header being line 1). */
const rowIndex = (where: string): number | null => {
  const line = /^sheet:(\d+)/.exec(where)?.[1];
  return line === undefined ? null : Math.max(0, Number(line) - 2);
};

/** @param columns of the sheet, in its order */
function problemsOf(error: unknown, columns: readonly string[] = []): Problem[] {
  if (error instanceof TankhueErrors) return error.all.flatMap((one) => problemsOf(one, columns));
  if (!(error instanceof TankhueError)) throw error;
  const { code, message, where, hint } = error;
  return [{ code, message, where, hint, row: rowIndex(where), column: columnOf(code, where, columns) }];
}

/** The column of the sheet: from `sheet:line:column`, else from the code. */
function columnOf(code: string, where: string, columns: readonly string[]): string | null {
  const cell = /^sheet:\d+:(\d+)/.exec(where)?.[1];
  if (cell !== undefined) return columns[Number(cell) - 1] ?? null;
  if (code.startsWith('column-')) return 'column';
  return code.startsWith('file-') ? 'file' : null;
}

function isFirstOfItsKind(problem: Problem, i: number, all: readonly Problem[]): boolean {
  return all.findIndex(({ code, where }) => code === problem.code && where === problem.where) === i;
}
