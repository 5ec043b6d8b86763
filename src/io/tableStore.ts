/** Numbers of a table as they arrive row by row, in blocks that never move; NaN where a cell holds none. */
export class TableStore {
  readonly width: number;
  readonly #rowsInBlock: number;
  readonly #blocks: Float64Array[] = [];
  readonly #lines: number[] = [];
  readonly #overRangeInRow = new Map<number, number>();
  readonly #overRangeInColumn = new Map<number, number>();

  /** @param width cells in a row */
  constructor(width: number) {
    this.width = width;
    this.#rowsInBlock = Math.max(1, Math.floor(65536 / width));
  }

  get rows(): number {
    return this.#lines.length;
  }

  /** Room for the next row: a block and where the row starts in it. The row counts once `append` is called. */
  room(): { readonly block: Float64Array; readonly offset: number } {
    const row = this.#lines.length;
    const index = Math.floor(row / this.#rowsInBlock);
    this.#blocks[index] ??= new Float64Array(this.#rowsInBlock * this.width);
    return { block: this.#blocks[index], offset: (row % this.#rowsInBlock) * this.width };
  }

  /**
   * Takes the row that was written into `room`.
   * @param line of the file, counted from 1
   * @param overRange cells that were marked as beyond the range
   */
  append(line: number, overRange: readonly number[] = []): void {
    if (overRange.length > 0) this.#overRangeInRow.set(this.#lines.length, overRange.length);
    for (const cell of overRange) this.#overRangeInColumn.set(cell, this.overRangeInColumn(cell) + 1);
    this.#lines.push(line);
  }

  value(row: number, cell: number): number {
    const block = this.#blocks[Math.floor(row / this.#rowsInBlock)]!;
    return block[(row % this.#rowsInBlock) * this.width + cell]!;
  }

  column(cell: number): Float64Array {
    const values = new Float64Array(this.rows);
    for (let row = 0; row < values.length; row++) values[row] = this.value(row, cell);
    return values;
  }

  isEmpty(cell: number): boolean {
    for (let row = 0; row < this.rows; row++) if (!Number.isNaN(this.value(row, cell))) return false;
    return this.overRangeInColumn(cell) === 0;
  }

  row(row: number): Float64Array {
    const offset = (row % this.#rowsInBlock) * this.width;
    return this.#blocks[Math.floor(row / this.#rowsInBlock)]!.slice(offset, offset + this.width);
  }

  /** Line of the file that a row came from. */
  line(row: number): number {
    return this.#lines[row]!;
  }

  overRangeInColumn(cell: number): number {
    return this.#overRangeInColumn.get(cell) ?? 0;
  }

  overRangeInRow(row: number): number {
    return this.#overRangeInRow.get(row) ?? 0;
  }
}
