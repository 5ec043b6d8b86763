import type { Finding } from '../finding.ts';
import { seriesEvents } from '../assay/seriesEvents.ts';
import { wideHeader } from '../io/wideRows.ts';
import { seriesLine, type SeriesRecord } from '../report/seriesNdjson.ts';
import { axisInWords, type SeriesPiece, type SeriesPieceResults } from './seriesChunk.ts';
import type { Bookmark, Piece, SeriesLayout } from './seriesSource.ts';
import { WorkerLost, type WorkerPool } from './workerPool.ts';

/** Whoever runs a series: where results go, and what is said about it. */
export interface SeriesSink {
  /** resolves when there is room for more */
  write(text: string): Promise<void>;
  /** a line for a person */
  tell(text: string): void;
  /** after each piece */
  reached(bookmark: Bookmark): void;
}

export interface SeriesSummary {
  readonly bookmark: Bookmark;
  readonly rows: number;
  readonly sound: number;
  readonly caution: number;
  readonly withheld: number;
}

interface Running {
  readonly piece: Piece;
  readonly answer: Promise<SeriesPieceResults>;
}

/** Times a piece is tried before it is cut in two. */
const TRIES = 2;
/** Changes of state that are told; a flickering series must not flood the terminal. */
const MOST_TOLD = 40;

type Pool = WorkerPool<SeriesPiece, SeriesPieceResults>;

/**
 * Pieces to workers, results out in the order of the file. At most two pieces a worker are under way, so a slow reader of the results
 * slows the reading of the file.
 */
export async function runSeries(
  pieces: AsyncIterator<Piece>,
  begin: { readonly layout: SeriesLayout; readonly bookmark: Bookmark },
  pool: Pool,
  jobs: number,
  sink: SeriesSink,
): Promise<SeriesSummary> {
  let { layout } = begin;
  let { axisAt } = begin.bookmark;
  const running: Running[] = [];
  const book = new Book(begin.bookmark, sink);
  const start = (piece: Piece): Running => {
    const answer = answerOf(pool, piece, layout, sink);
    // It is awaited in its turn; until then a refusal is not lost.
    answer.catch(() => undefined);
    return { piece, answer };
  };
  let ended = false;
  let next: Promise<IteratorResult<Piece>> | null = null;
  for (;;) {
    while (!ended && running.length < 2 * jobs) {
      next ??= pieces.next();
      // What is under way is not held up by a file that does not grow.
      const got =
        running.length === 0
          ? await next
          : await Promise.race([
              next,
              running[0]!.answer.then(
                () => null,
                () => null,
              ),
            ]);
      if (got === null) break;
      next = null;
      if (got.done) ended = true;
      else running.push(start(got.value));
    }
    const first = running.shift();
    if (!first) return book.summary();
    const results = await first.answer;
    await sink.write(book.linesOf(results, first.piece.offset, layout, axisAt));
    if (results.header === null) sink.reached(book.passed(first.piece.offset + first.piece.bytes.length, axisAt));
    else {
      const { bytes, offset } = first.piece;
      const end = bytes.indexOf(10, results.header) + 1;
      axisAt = offset + results.header;
      layout = {
        kind: 'wide',
        wide: wideHeader(new TextDecoder().decode(bytes.subarray(results.header, end)).trim())!,
      };
      sink.tell(`a new line of wavelengths at byte ${axisAt}: read with it from row ${book.row + 1} on`);
      sink.reached(book.passed(offset + end, axisAt));
      // What was begun with the old wavelengths is begun anew.
      const again = [{ offset: offset + end, bytes: bytes.subarray(end) }, ...running.map((one) => one.piece)];
      running.splice(0, running.length, ...again.filter((piece) => piece.bytes.length > 0).map(start));
    }
  }
}

/** A lost worker costs a second try; then the piece is halved until the row that breaks workers stands alone and is named. */
async function answerOf(pool: Pool, piece: Piece, layout: SeriesLayout, sink: SeriesSink): Promise<SeriesPieceResults> {
  for (let attempt = 1; attempt <= TRIES; attempt++) {
    try {
      return await pool.run({ bytes: piece.bytes, layout });
    } catch (error) {
      if (!(error instanceof WorkerLost)) throw error;
      sink.tell(
        `a worker was lost at bytes ${piece.offset} to ${piece.offset + piece.bytes.length} (${error.message}); ${attempt < TRIES ? 'trying again' : 'looking for the row'}`,
      );
    }
  }
  const half = piece.bytes.indexOf(10, piece.bytes.length >> 1) + 1;
  const cut = half > 0 && half < piece.bytes.length ? half : piece.bytes.indexOf(10) + 1;
  if (cut <= 0 || cut >= piece.bytes.length) return lostRow(piece.bytes.length, layout);
  const front = await answerOf(pool, { offset: piece.offset, bytes: piece.bytes.subarray(0, cut) }, layout, sink);
  if (front.header !== null) return front;
  return joined(
    front,
    await answerOf(pool, { offset: piece.offset + cut, bytes: piece.bytes.subarray(cut) }, layout, sink),
    cut,
  );
}

function lostRow(bytes: number, layout: SeriesLayout): SeriesPieceResults {
  const none = Float64Array.of(NaN);
  return {
    count: 1,
    start: Float64Array.of(0),
    end: Float64Array.of(bytes),
    labels: [[]],
    stateOfCharge: none,
    uncertainty: none,
    total: none,
    totalUncertainty: none,
    match: none,
    diagnosis: Int32Array.of(0),
    diagnoses: [
      {
        state: 'withheld',
        pair: 'V4/V5',
        findings: [
          {
            code: 'worker-lost',
            severity: 'withhold',
            message: 'the row could not be read: a worker was lost each time it was tried',
            hint: 'look at the line in the file; if it looks sound please report it',
          },
        ],
      },
    ],
    assayedBefore: Int32Array.of(0),
    axis: Int32Array.of(0),
    axes: [axisInWords(layout.kind === 'wide' ? layout.wide.wavelength : layout.axis.wavelength)],
    header: null,
  };
}

function joined(front: SeriesPieceResults, back: SeriesPieceResults, cut: number): SeriesPieceResults {
  const numbers = (of: (one: SeriesPieceResults) => Float64Array, add = 0): Float64Array =>
    Float64Array.of(...of(front), ...of(back).map((value) => value + add));
  return {
    count: front.count + back.count,
    start: numbers((one) => one.start).map((value, i) => (i < front.count ? value : value + cut)),
    end: numbers((one) => one.end).map((value, i) => (i < front.count ? value : value + cut)),
    labels: [...front.labels, ...back.labels],
    stateOfCharge: numbers((one) => one.stateOfCharge),
    uncertainty: numbers((one) => one.uncertainty),
    total: numbers((one) => one.total),
    totalUncertainty: numbers((one) => one.totalUncertainty),
    match: numbers((one) => one.match),
    diagnosis: Int32Array.of(...front.diagnosis, ...back.diagnosis.map((i) => i + front.diagnoses.length)),
    diagnoses: [...front.diagnoses, ...back.diagnoses],
    assayedBefore: Int32Array.of(...front.assayedBefore, ...back.assayedBefore),
    axis: Int32Array.of(...front.axis, ...back.axis.map((i) => i + front.axes.length)),
    axes: [...front.axes, ...back.axes],
    header: back.header === null ? null : back.header + cut,
  };
}

/** Rows in order: numbers them, asks what neighbours say, counts, tells changes. */
class Book {
  row: number;
  private byte: number;
  private axisAt: number;
  private readonly sink: SeriesSink;
  private readonly first: number;
  private readonly events = seriesEvents();
  private readonly counts = { sound: 0, caution: 0, withheld: 0 };
  private lastState: string | null = null;
  private told = 0;

  constructor(bookmark: Bookmark, sink: SeriesSink) {
    this.row = bookmark.row;
    this.first = bookmark.row;
    this.byte = bookmark.byte;
    this.axisAt = bookmark.axisAt;
    this.sink = sink;
  }

  linesOf(results: SeriesPieceResults, offset: number, layout: SeriesLayout, axisAt: number): string {
    const names = layout.kind === 'wide' ? layout.wide.labels : ['sample', 'time'];
    const timeColumn = names.findIndex((name) => /time|date|taken|clock|zeit/i.test(name));
    let text = '';
    for (let i = 0; i < results.count; i++) {
      this.row += 1;
      const labels = results.labels[i]!;
      const diagnosis = results.diagnoses[results.diagnosis[i]!]!;
      const match = numberOrNull(results.match[i]!);
      const events = this.events({
        row: this.row,
        time: timeOf(labels[timeColumn] ?? null),
        match: diagnosis.findings.some((one) => one.code === 'too-faint') ? null : match,
        axis: results.axes[results.axis[i]!]!,
      });
      const findings = [...events, ...diagnosis.findings.filter((one) => one.severity !== 'note')];
      const state = diagnosis.state === 'sound' && events.length > 0 ? 'caution' : diagnosis.state;
      const record: SeriesRecord = {
        row: this.row,
        byte: [offset + results.start[i]!, offset + results.end[i]!],
        axisAt,
        label: Object.fromEntries(names.map((name, j) => [name === '' ? `column ${j + 1}` : name, labels[j] ?? null])),
        state,
        pair: diagnosis.pair,
        stateOfCharge: {
          value: numberOrNull(results.stateOfCharge[i]!),
          uncertainty: numberOrNull(results.uncertainty[i]!),
        },
        totalVanadium: {
          value: numberOrNull(results.total[i]!),
          uncertainty: numberOrNull(results.totalUncertainty[i]!),
        },
        match,
        assayed: results.assayedBefore[i]! < 0 ? null : this.row - results.assayedBefore[i]!,
        findings,
      };
      this.count(record, events);
      text += seriesLine(record);
    }
    return text;
  }

  passed(byte: number, axisAt: number): Bookmark {
    this.byte = byte;
    this.axisAt = axisAt;
    return { byte, row: this.row, axisAt };
  }

  summary(): SeriesSummary {
    return {
      bookmark: { byte: this.byte, row: this.row, axisAt: this.axisAt },
      rows: this.row - this.first,
      ...this.counts,
    };
  }

  private count(record: SeriesRecord, events: readonly Finding[]): void {
    this.counts[record.state] += 1;
    for (const event of events) this.say(`row ${record.row}: ${event.message}; ${event.hint}`);
    const now = record.state === 'withheld' ? record.findings.map((one) => one.code).join(', ') : 'reported';
    if (now !== (this.lastState ?? 'reported')) {
      const why = record.findings.find((one) => one.severity === 'withhold');
      this.say(
        record.state === 'withheld'
          ? `row ${record.row}: withheld from here on: ${why?.message ?? now}`
          : `row ${record.row}: results again`,
      );
    }
    this.lastState = now;
  }

  private say(text: string): void {
    this.told += 1;
    if (this.told <= MOST_TOLD) this.sink.tell(text);
    if (this.told === MOST_TOLD) this.sink.tell('more changes are only in the results');
  }
}

const numberOrNull = (value: number): number | null => (Number.isFinite(value) ? value : null);

/** Seconds or whatever unit a plain number has; milliseconds of a date. Only compared with its neighbours. */
function timeOf(text: string | null): number | null {
  if (text === null || text === '') return null;
  const value = /^[+-]?\d+(?:[.,]\d+)?$/.test(text) ? Number(text.replace(',', '.')) : Date.parse(text);
  return Number.isFinite(value) ? value : null;
}
