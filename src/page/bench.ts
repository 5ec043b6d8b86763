import type { AssayDocument, BalanceDocument, Calibration, ReadOptions } from '../index.ts';
import { readAssayDocument, readBalanceDocument, TankhueError } from '../index.ts';
import { base64Of, bytesOf, forgetKept, keep, kept } from './kept.ts';
import { REFERENCE_NAME, type FileRead, type Problem, type Results, type SeriesRequest } from './protocol.ts';
import type { SheetCells } from './sheetColumns.ts';
import { sheetToCompute, writtenColumns } from './sheetText.ts';
import { Cancelled, WorkerLine } from './workerLine.ts';

export interface BenchFile {
  readonly name: string;
  readonly bytes: Uint8Array;
  readonly options: ReadOptions;
  /** null while it is being read */
  readonly read: FileRead | null;
  /** 0…1 */
  readonly progress: number;
  readonly survivesReload: boolean;
}

export interface LongTask {
  readonly title: string;
  /** 0…1 */
  readonly done: number;
}

export interface BenchState {
  readonly rows: readonly SheetCells[];
  readonly shownColumns: readonly string[];
  readonly files: readonly BenchFile[];
  /** name of the file in use, or that of the shipped one */
  readonly calibration: string;
  readonly results: Results | null;
  /** ms from the change to the answer */
  readonly answeredIn: number | null;
  readonly longTask: LongTask | null;
  readonly inspected: { readonly calibration: Calibration; readonly sha256: string } | null;
  readonly series: { readonly file: string; readonly assays: AssayDocument } | null;
  readonly opened: { readonly name: string; readonly document: AssayDocument | BalanceDocument } | null;
  /** problems that concern neither a file nor a row */
  readonly problems: readonly Problem[];
  /** last thing that happened, for a screen reader and the eye */
  readonly notice: string;
  readonly demo: string | null;
}

const EMPTY_ROWS: readonly SheetCells[] = [
  { side: 'negative', dilution: '1' },
  { side: 'positive', dilution: '1' },
];

const START: BenchState = {
  rows: EMPTY_ROWS,
  shownColumns: [],
  files: [],
  calibration: REFERENCE_NAME,
  results: null,
  answeredIn: null,
  longTask: null,
  inspected: null,
  series: null,
  opened: null,
  problems: [],
  notice: '',
  demo: null,
};

/** State of the page and everything a person can do to it. */
export class Bench {
  state: BenchState = START;
  private line = new WorkerLine();
  private longLine: WorkerLine | null = null;
  private readonly listeners = new Set<() => void>();
  private isComputing = false;
  private isStale = false;
  private changedAt = 0;
  private readonly base64 = new WeakMap<Uint8Array, string>();
  private keepTimer: ReturnType<typeof setTimeout> | undefined;

  subscribe(listener: () => void): () => void {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  }

  private set(change: Partial<BenchState>): void {
    this.state = { ...this.state, ...change };
    for (const listener of this.listeners) listener();
  }

  /** Takes up what was kept before a reload. */
  async restore(): Promise<void> {
    const before = kept();
    if (before === null) return;
    this.set({ rows: before.rows, shownColumns: before.shownColumns });
    await this.addFiles(
      before.files.map(({ name, options, base64 }) => ({ name, options, bytes: bytesOf(base64) })),
      false,
    );
    if (this.state.files.some(({ name }) => name === before.calibration)) this.set({ calibration: before.calibration });
    this.changed();
  }

  /** @param isNew dropped by the person now: rows are filled from it; false when it comes back after a reload */
  async addFiles(
    dropped: readonly { name: string; bytes: Uint8Array; options?: ReadOptions }[],
    isNew = true,
  ): Promise<void> {
    const added = dropped.map(({ name, bytes, options = {} }): BenchFile => ({
      name,
      bytes,
      options,
      read: null,
      progress: 0,
      survivesReload: true,
    }));
    const names = new Set(added.map(({ name }) => name));
    this.set({ files: [...this.state.files.filter(({ name }) => !names.has(name)), ...added] });
    for (const file of added) await this.readFile(file, isNew);
    this.changed();
  }

  private async readFile(file: BenchFile, isNew: boolean): Promise<void> {
    const { name, bytes, options } = file;
    try {
      const read = await this.line.ask('read', { name, bytes, options }, (progress) =>
        this.changeFile(name, { progress }),
      );
      this.changeFile(name, { read, progress: 1 });
      if (isNew) this.takeUp(read);
      this.set({ notice: read.problems.length > 0 ? `${name} cannot be read` : `${name} was read` });
    } catch (error) {
      if (error instanceof Cancelled) return;
      throw error;
    }
  }

  private changeFile(name: string, change: Partial<BenchFile>): void {
    this.set({ files: this.state.files.map((file) => (file.name === name ? { ...file, ...change } : file)) });
  }

  /** What a newly dropped file does to the sheet. */
  private takeUp(read: FileRead): void {
    if (read.kind === 'tanks-sheet' && this.isSheetUntouched()) this.useSheet(read.name);
    if (read.kind === 'spectra') this.set({ rows: withFile(this.state.rows, read) });
    if (read.kind === 'calibration') this.set({ calibration: read.name });
    if (read.kind === 'report' || read.kind === 'record') this.open(read);
  }

  private isSheetUntouched(): boolean {
    return this.state.rows.every((row) =>
      Object.entries(row).every(
        ([column, cell]) => ['side', 'dilution', 'file', 'sample'].includes(column) || cell === '',
      ),
    );
  }

  /** Takes the rows of a dropped sheet in place of those on the page. */
  useSheet(name: string): void {
    const rows = this.state.files.find((file) => file.name === name)?.read?.rows;
    if (!rows) return;
    this.set({ rows, shownColumns: Object.keys(rows[0] ?? {}), notice: `the table now holds ${name}` });
    this.changed();
  }

  private open(read: FileRead): void {
    try {
      const text = read.text!;
      const document = text.includes('"tankhue/balance/1"')
        ? readBalanceDocument(text, read.name)
        : readAssayDocument(text, read.name);
      this.set({ opened: { name: read.name, document } });
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      const { code, message, where, hint } = error;
      this.changeFile(read.name, {
        read: { ...read, problems: [{ code, message, where, hint, row: null, column: null }] },
      });
    }
  }

  closeOpened(): void {
    this.set({ opened: null });
  }

  /** Reads a file again, told how. */
  async rereadFile(name: string, options: ReadOptions): Promise<void> {
    this.changeFile(name, { options, read: null, progress: 0 });
    await this.readFile({ ...this.state.files.find((file) => file.name === name)! }, true);
    this.changed();
  }

  async removeFile(name: string): Promise<void> {
    const calibration = this.state.calibration === name ? REFERENCE_NAME : this.state.calibration;
    this.set({
      files: this.state.files.filter((file) => file.name !== name),
      calibration,
      notice: `${name} was removed`,
    });
    await this.line.ask('forget', { name });
    this.changed();
  }

  /** Stops reading: the worker is ended and a new one reads again what had been read before. */
  async cancelReading(): Promise<void> {
    this.line.hangUp();
    this.line = new WorkerLine();
    this.isComputing = false;
    const done = this.state.files.filter(({ read }) => read !== null);
    const stopped = this.state.files.filter(({ read }) => read === null).map(({ name }) => name);
    this.set({ files: done, notice: `cancelled: ${stopped.join(', ')}` });
    for (const { name, bytes, options } of done) await this.line.ask('read', { name, bytes, options });
    this.changed();
  }

  setCell(row: number, column: string, text: string): void {
    this.set({ rows: this.state.rows.map((cells, i) => (i === row ? { ...cells, [column]: text } : cells)) });
    this.changed();
  }

  addRow(side = ''): void {
    this.set({ rows: [...this.state.rows, { side, dilution: '1' }] });
    this.changed();
  }

  removeRow(row: number): void {
    this.set({ rows: this.state.rows.filter((_, i) => i !== row), notice: `row ${row + 1} was removed` });
    this.changed();
  }

  showColumn(column: string): void {
    this.set({ shownColumns: [...this.state.shownColumns, column] });
    this.changed();
  }

  chooseCalibration(name: string): void {
    this.set({ calibration: name, inspected: null });
    this.changed();
  }

  async inspect(): Promise<void> {
    this.set({ inspected: await this.line.ask('inspect', { calibration: this.state.calibration }) });
  }

  closeInspected(): void {
    this.set({ inspected: null });
  }

  /** Builds a calibration from a dropped sheet of standards and the dropped spectra; the result becomes one more file. */
  async build(sheetName: string): Promise<void> {
    const sheet = this.state.files.find(({ name }) => name === sheetName)?.read?.text;
    if (sheet === undefined) return;
    await this.long(`building a calibration from ${sheetName}`, async (line, progress) => {
      await this.readAllInto(line);
      const built = await line.ask('build', { sheet, name: sheetName }, progress);
      if (!built.calibration) {
        this.changeFile(sheetName, { read: { ...this.readOf(sheetName), problems: built.problems } });
        return;
      }
      this.changeFile(sheetName, { read: { ...this.readOf(sheetName), problems: [] } });
      const name = `${sheetName.replace(/\.[^.]*$/, '')}-calibration.json`;
      await this.addFiles([{ name, bytes: new TextEncoder().encode(built.text) }]);
      this.set({
        inspected: { calibration: built.calibration, sha256: built.sha256 },
        notice: `${name} was built and is in use`,
      });
    });
  }

  private readOf(name: string): FileRead {
    return this.state.files.find((file) => file.name === name)!.read!;
  }

  /** Assays every spectrum of one file. */
  async runSeries(request: Omit<SeriesRequest, 'calibration'>): Promise<void> {
    await this.long(`assaying ${request.file}`, async (line, progress) => {
      await this.readAllInto(line, (name) => name === request.file || name === this.state.calibration);
      const { assays, problems } = await line.ask(
        'series',
        { ...request, calibration: this.state.calibration },
        progress,
      );
      this.set({
        series: assays ? { file: request.file, assays } : null,
        problems,
        notice: assays ? `${assays.assays.length} spectra assayed` : 'nothing could be assayed',
      });
    });
  }

  closeSeries(): void {
    this.set({ series: null });
  }

  /** Long work has a worker of its own, so that the page answers meanwhile and can end it. */
  private async long(
    title: string,
    work: (line: WorkerLine, progress: (done: number) => void) => Promise<void>,
  ): Promise<void> {
    this.longLine?.hangUp();
    const line = new WorkerLine();
    this.longLine = line;
    this.set({ longTask: { title, done: 0 }, problems: [] });
    try {
      await work(line, (done) => this.set({ longTask: { title, done } }));
    } catch (error) {
      if (!(error instanceof Cancelled)) throw error;
      this.set({ notice: `cancelled: ${title}` });
    } finally {
      line.hangUp();
      if (this.longLine === line) {
        this.longLine = null;
        this.set({ longTask: null });
      }
    }
  }

  private async readAllInto(line: WorkerLine, isWanted: (name: string) => boolean = () => true): Promise<void> {
    for (const { name, bytes, options } of this.state.files)
      if (isWanted(name)) await line.ask('read', { name, bytes, options });
  }

  cancelLongTask(): void {
    this.longLine?.hangUp();
  }

  /** Puts an invented plant on the bench in place of what is there. */
  async showDemo(plant: string): Promise<void> {
    const { files, sheet } = await this.line.ask('demo', { plant });
    for (const { name } of this.state.files) await this.line.ask('forget', { name });
    this.set({ ...START, demo: plant });
    const encode = (text: string): Uint8Array => new TextEncoder().encode(text);
    await this.addFiles([
      { name: `${plant}-tanks.csv`, bytes: encode(sheet) },
      ...files.map(({ name, text }) => ({ name, bytes: encode(text) })),
    ]);
  }

  async forgetAll(): Promise<void> {
    forgetKept();
    clearTimeout(this.keepTimer);
    for (const { name } of this.state.files) await this.line.ask('forget', { name });
    this.set({ ...START, notice: 'everything was forgotten' });
  }

  private changed(): void {
    this.changedAt = performance.now();
    clearTimeout(this.keepTimer);
    this.keepTimer = setTimeout(() => this.keepNow(), 300);
    void this.compute();
  }

  private keepNow(): void {
    const { rows, shownColumns, calibration, files } = this.state;
    const left = new Set(
      keep({
        rows,
        shownColumns,
        calibration,
        files: files.map(({ name, options, bytes }) => ({ name, options, base64: this.encoded(bytes) })),
      }),
    );
    if (files.some(({ name, survivesReload }) => survivesReload === left.has(name)))
      this.set({ files: files.map((file) => ({ ...file, survivesReload: !left.has(file.name) })) });
  }

  private encoded(bytes: Uint8Array): string {
    const known = this.base64.get(bytes) ?? base64Of(bytes);
    this.base64.set(bytes, known);
    return known;
  }

  /** One computation at a time; what changes meanwhile is computed after it. */
  private async compute(): Promise<void> {
    if (this.isComputing) {
      this.isStale = true;
      return;
    }
    if (!this.state.rows.some(({ file }) => (file ?? '') !== '')) {
      this.set({ results: null, answeredIn: null });
      return;
    }
    this.isComputing = true;
    this.isStale = false;
    const since = this.changedAt;
    const { rows, shownColumns, calibration } = this.state;
    try {
      const sheet = sheetToCompute(rows, writtenColumns(rows, shownColumns));
      const results = await this.line.ask('compute', { sheet, calibration });
      this.set({ results, answeredIn: performance.now() - since });
    } catch (error) {
      if (!(error instanceof Cancelled)) throw error;
    } finally {
      this.isComputing = false;
    }
    if (this.isStale) await this.compute();
  }
}

/** Puts a file of spectra into the rows that wait for one: the row whose side its name mentions, else the next. */
function withFile(rows: readonly SheetCells[], { name, columns }: FileRead): readonly SheetCells[] {
  if (rows.some((row) => row['file'] === name)) return rows;
  const waiting = rows.filter((row) => (row['file'] ?? '') === '');
  const named = waiting.find((row) => mentions(name, row['side'] ?? ''));
  const bothSides = columns.length === 2 && waiting.length === 2 && columns.every((column) => sideIn(column) !== null);
  const targets = bothSides ? waiting : [named ?? waiting[0]];
  return rows.map((row) => {
    if (!targets.includes(row)) return row;
    const column = bothSides ? columns.find((one) => mentions(one, row['side'] ?? '')) : undefined;
    return {
      ...row,
      file: name,
      sample: row['sample'] || (column ?? name.replace(/\.[^.]*$/, '')),
      column: column ?? '',
    };
  });
}

const sideIn = (text: string): 'negative' | 'positive' | null => {
  if (/neg/i.test(text)) return 'negative';
  return /pos/i.test(text) ? 'positive' : null;
};
const mentions = (text: string, side: string): boolean => sideIn(text) !== null && sideIn(text) === side;
