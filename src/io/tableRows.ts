import { TankhueError, TankhueErrors, quoted } from '../errors.ts';
import { kindOfCell, splitCells } from './cells.ts';
import type { NumberBlock } from './numberBlock.ts';
import { numberFormOf, readNumberRow, type NumberForm } from './numberRow.ts';
import { numberFromText } from './numberText.ts';
import { TableStore } from './tableStore.ts';

/** Problems shown of one file; the rest are counted. */
const MOST_SHOWN = 10;
/** A row goes on from the one before when its axis value lies within so many steps. */
const MOST_STEPS_ON = 20;
/** Lines without numbers that are kept in case numbers follow. */
const MOST_PENDING = 1000;

/** Problems of one file, thrown together. */
class Problems {
  readonly #shown: TankhueError[] = [];
  #more = 0;

  add(code: string, message: string, where: string, hint: string): void {
    if (this.#shown.length < MOST_SHOWN) this.#shown.push(new TankhueError(code, message, where, hint));
    else this.#more++;
  }

  throwAny(): void {
    const [first, ...others] = this.#shown;
    if (!first) return;
    if (others.length === 0) throw first;
    const last = others.at(-1)!;
    if (this.#more > 0)
      others[others.length - 1] = new TankhueError(
        last.code,
        last.message,
        last.where,
        `${last.hint}; ${this.#more} more problems in this file`,
      );
    throw new TankhueErrors([first, ...others]);
  }
}

export interface TableRows {
  /** first cell of each row, where rows have labels */
  readonly labels: readonly string[];
  readonly footerLines: number;
}

interface PendingLine {
  readonly number: number;
  readonly text: string;
}

/** Takes the lines of a block of numbers one after another. */
export class RowCollector {
  readonly #file: string;
  readonly #block: NumberBlock;
  readonly #store: TableStore;
  readonly #form: NumberForm;
  readonly #labels: string[] = [];
  readonly #shortRows: PendingLine[] = [];
  readonly #problems = new Problems();
  readonly #encoder = new TextEncoder();
  #bytes = new Uint8Array(4096);
  #pending: PendingLine[] = [];

  constructor(file: string, block: NumberBlock) {
    this.#file = file;
    this.#block = block;
    this.#store = new TableStore(block.cells - block.labels);
    this.#form = numberFormOf(block.separator, block.decimal);
  }

  /** @param number of the line in the file, from 1 */
  take(text: string, number: number): void {
    if (this.#takeNumbers(text, number)) return;
    const cells = cellsOfBlock(text, this.#block);
    while (cells.length > this.#block.cells && cells.at(-1) === '') cells.pop();
    const kinds = cells.map(kindOfCell);
    if (kinds.every((kind) => kind === 'empty')) return;
    const values = kinds.slice(this.#block.labels);
    const fits = cells.length === this.#block.cells || this.#endsEarly(cells);
    if (!fits || values.includes('text') || !values.includes('number')) {
      if (this.#pending.length < MOST_PENDING) this.#pending.push({ number, text });
      return;
    }
    this.#judgePending(cells[0]!, number);
    if (cells.length < this.#block.cells) this.#shortRows.push({ number, text });
    this.#store.append(number, this.#write(cells, number));
    if (this.#block.labels > 0) this.#labels.push(cells[0]!);
  }

  /** A row of nothing but numbers, without a string for each; false where it is anything else. */
  #takeNumbers(text: string, number: number): boolean {
    const { cells, labels, commaBoth } = this.#block;
    if (labels > 0 || commaBoth || this.#pending.length > 0) return false;
    if (this.#bytes.length < text.length * 3) this.#bytes = new Uint8Array(text.length * 3);
    const { written } = this.#encoder.encodeInto(text, this.#bytes);
    const { block, offset } = this.#store.room();
    if (readNumberRow(this.#bytes.subarray(0, written), this.#form, block, offset, cells) !== cells) return false;
    if (block.subarray(offset, offset + cells).every(Number.isNaN)) return false;
    this.#store.append(number);
    return true;
  }

  /** Where axis and values alternate, the longer pairs go on alone. */
  #endsEarly(cells: readonly string[]): boolean {
    const { cells: width, orientation } = this.#block;
    const inPairs = orientation === 'columns' && width % 2 === 0 && cells.length % 2 === 0;
    return inPairs && cells.length >= 2 && cells.length < width;
  }

  /** @returns the cells that were marked as over range */
  #write(cells: readonly string[], number: number): number[] {
    const { labels, decimal } = this.#block;
    const { block, offset } = this.#store.room();
    const overRange: number[] = [];
    for (let i = 0; i < this.#store.width; i++) {
      const cell = cells[i + labels] ?? '';
      const value = numberFromText(cell, decimal);
      block[offset + i] = value;
      if (!Number.isNaN(value)) continue;
      const kind = kindOfCell(cell);
      if (kind === 'over-range') overRange.push(i);
      if (kind === 'number')
        this.#problems.add(
          'decimal-mark',
          `expected a number with a decimal ${decimal} as in the other rows; received ${quoted(cell)}`,
          `${this.#file}:${number}:${i + labels + 1}`,
          'export the file again with one decimal mark throughout',
        );
    }
    return overRange;
  }

  /** Lines that were no rows turned out to lie between rows: bad rows, or the captions of a second table. */
  #judgePending(firstCell: string, number: number): void {
    const pending = this.#pending;
    if (pending.length === 0) return;
    this.#pending = [];
    if (!pending.some(({ text }) => this.#resemblesRow(text)) && this.#stepsOn(firstCell) <= 0) {
      this.#problems.throwAny();
      throw new TankhueError(
        'second-table',
        `expected one table; received numbers again after ${quoted(pending[0]!.text.trim())}`,
        `${this.#file}:${number}:1`,
        'save each table as a file of its own',
      );
    }
    for (const line of pending) this.#refuse(line);
  }

  /** How many steps a line's first cell lies beyond the last axis value; NaN where that cannot be said. */
  #stepsOn(firstCell: string): number {
    const { rows } = this.#store;
    if (this.#block.orientation === 'rows' || rows < 2) return NaN;
    const next = numberFromText(firstCell, this.#block.decimal);
    const [before, last] = [this.#store.value(rows - 2, 0), this.#store.value(rows - 1, 0)];
    return (next - last) / (last - before);
  }

  /** A line below the last row that looks like one more of them, and not like a footer that happens to begin with a number. */
  #goesOn(text: string): boolean {
    if (!this.#resemblesRow(text)) return false;
    const steps = this.#stepsOn(cellsOfBlock(text, this.#block)[0]!);
    return Number.isNaN(steps) || (steps > 0 && steps < MOST_STEPS_ON);
  }

  #resemblesRow(text: string): boolean {
    const { cells: width, labels } = this.#block;
    const cells = cellsOfBlock(text, this.#block);
    const kinds = cells.map(kindOfCell);
    if (labels > 0) return kinds.slice(labels).filter((kind) => kind === 'number').length >= (width - labels) / 2;
    return kinds[0] === 'number' && (cells.length === width || !kinds.includes('text'));
  }

  #refuse({ number, text }: PendingLine): void {
    const { cells: width, labels } = this.#block;
    const cells = cellsOfBlock(text, this.#block);
    const bad = cells.findIndex((cell, i) => i >= labels && kindOfCell(cell) === 'text');
    const ragged = cells.length !== width || bad < 0;
    this.#problems.add(
      ragged ? 'row-ragged' : 'not-a-number',
      ragged
        ? `expected ${width} cells as in the other rows; received ${cells.length}: ${quoted(text.trim())}`
        : `expected a number; received ${quoted(cells[bad]!)}`,
      `${this.#file}:${number}:${ragged ? 1 : bad + 1}`,
      'mend or delete this line, or export the file again',
    );
  }

  /** The numbers so far. */
  get store(): TableStore {
    return this.#store;
  }

  /**
   * @param inPairs rows may end early by whole pairs of axis and value
   * @throws TankhueError, TankhueErrors with the problems of all lines
   */
  finish(inPairs: boolean): TableRows {
    if (!inPairs) for (const line of this.#shortRows) this.#refuse(line);
    for (const line of this.#pending) if (this.#goesOn(line.text)) this.#refuse(line);
    this.#problems.throwAny();
    return { labels: this.#labels, footerLines: this.#pending.length };
  }
}

/** Cells of a line as the block has them: 400,5,0,123 joined two by two where commas are both marks. */
export function cellsOfBlock(text: string, block: NumberBlock): string[] {
  const cells = splitCells(text, block.separator);
  if (!block.commaBoth || cells.length % 2 === 1) return cells;
  return Array.from({ length: cells.length / 2 }, (_, i) => `${cells[2 * i]},${cells[2 * i + 1]}`);
}
