import { splitCells } from './cells.ts';
import type { AxisUnit, OrdinateUnit, Separator } from './readOptions.ts';
import { axisUnitOf, bareUnitOf, isUnitOnly, ordinateUnitOf, statedAxisUnit, statedOrdinateUnit } from './unitWords.ts';

const isRule = (line: string): boolean => /^[-=_~#*+\s|]*$/.test(line);

/** Most caption rows that a table has: names, units, and a row of either above. */
const MOST_ROWS = 3;

/** A line's cells when there are as many as the table is wide, trailing empty ones aside. */
function captionCells(line: string, separator: Separator, width: number): string[] | null {
  const plain = line.replace(/^\s*[#%!]+\s*/, '');
  const splits = [splitCells(plain, separator)];
  if (separator === 'space') splits.unshift(plain.trim().split(/\s{2,}|\t/));
  for (const cells of splits) {
    while (cells.length > width && cells.at(-1) === '') cells.pop();
    if (width > 2 && cells.length === width - 1) cells.push('');
    if (cells.length === width && cells.some((cell) => cell !== '')) return cells;
  }
  return null;
}

/** A second row holds names over units: all cells filled, or the first empty or an axis word, or names over pairs. */
function belongsAbove(cells: readonly string[]): boolean {
  const axisFirst = cells[0] === '' || axisUnitOf(cells[0]!) !== null;
  if (cells.length === 2) return axisFirst;
  const namesOverPairs = cells.length % 2 === 0 && cells.every((cell, i) => (i % 2 === 0) === (cell !== ''));
  return axisFirst || namesOverPairs || cells.every((cell) => cell !== '');
}

interface CaptionRows {
  readonly rows: string[][];
  /** index of the highest of them */
  readonly first: number;
}

function rowsAbove(lines: readonly string[], separator: Separator, width: number): CaptionRows {
  const rows: string[][] = [];
  let first = lines.length;
  for (let i = lines.length - 1; i >= 0 && rows.length < MOST_ROWS; i--) {
    if (rows.length === 0 && isRule(lines[i]!)) continue;
    const cells = captionCells(lines[i]!, separator, width);
    if (!cells || (rows.length > 0 && !belongsAbove(cells))) break;
    rows.unshift(cells);
    first = i;
    if (!cells.every((cell) => cell === '' || isUnitOnly(cell))) break;
  }
  return { rows, first };
}

const firstKnown = <Unit>(captions: readonly string[], unitOf: (caption: string) => Unit | null): Unit | null => {
  for (const caption of captions) {
    const unit = unitOf(caption);
    if (unit !== null) return unit;
  }
  return null;
};

/** The unit that lines state, where all that state one agree. */
function onlyUnit<Unit>(lines: readonly string[], unitOf: (line: string) => Unit | null): Unit | null {
  const units = new Set(lines.map(unitOf).filter((unit) => unit !== null));
  return units.size === 1 ? [...units][0]! : null;
}

/** What stands above a table: captions of its columns, and prose. */
export class Captions {
  readonly #rows: readonly (readonly string[])[];
  readonly #prose: readonly string[];
  /** the only units that the prose states */
  readonly #statedOrdinate: OrdinateUnit | null;
  readonly #statedAxis: AxisUnit | null;

  /**
   * @param above the lines above the numbers, all of them
   * @param width cells in a row of numbers
   */
  constructor(above: readonly string[], separator: Separator, width: number) {
    const { rows, first } = rowsAbove(above, separator, width);
    this.#rows = rows;
    this.#prose = above.slice(0, first);
    this.#statedOrdinate = onlyUnit(this.#prose, statedOrdinateUnit);
    this.#statedAxis = onlyUnit(this.#prose, statedAxisUnit);
  }

  /** Captions of a column from top to bottom, empty ones left out. */
  of(column: number): string[] {
    return this.#rows.map((row) => row[column]!).filter((caption) => caption !== '');
  }

  axisUnit(column: number): AxisUnit | null {
    return firstKnown(this.of(column), axisUnitOf);
  }

  /** What the prose says of the axis, where no caption does. */
  get statedAxisUnit(): AxisUnit | null {
    return this.#statedAxis;
  }

  /** The axis of a table whose axis runs along its first line: the corner names it, or a line above. */
  axisUnitAlong(corner: string): AxisUnit | null {
    return firstKnown([corner, ...this.#prose.slice(-MOST_ROWS)], axisUnitOf) ?? this.#statedAxis;
  }

  ordinateUnitAlong(corner: string): OrdinateUnit | null {
    return firstKnown([corner, ...this.#prose.slice(-MOST_ROWS)], ordinateUnitOf) ?? this.#statedOrdinate;
  }

  /** True where every one of the columns has a caption that is nothing but a unit. */
  haveUnits(columns: readonly number[]): boolean {
    return columns.every((column) => this.of(column).some(isUnitOnly));
  }

  /**
   * A column's caption, else the only unit that the prose states.
   * @param unitsThroughout whether a lone A or T is a unit, as `haveUnits` tells; else it may be a name
   */
  ordinateUnit(column: number, unitsThroughout: boolean): OrdinateUnit | null {
    const captions = this.of(column);
    return (
      firstKnown(captions, ordinateUnitOf) ??
      (unitsThroughout ? firstKnown(captions, bareUnitOf) : null) ??
      this.#statedOrdinate
    );
  }

  /** A column's name: its caption that is more than a unit, else its unit, else its number. */
  name(column: number): string {
    const own = this.of(column);
    return own.find((caption) => !isUnitOnly(caption)) ?? own[0] ?? `column ${column + 1}`;
  }

  /** Over a pair of axis and values the name often stands above the axis. */
  nameOfPair(axisColumn: number): string {
    const own = this.of(axisColumn + 1).find((caption) => !isUnitOnly(caption));
    const overAxis = this.of(axisColumn).find((caption) => !isUnitOnly(caption) && axisUnitOf(caption) === null);
    return own ?? overAxis ?? `column ${axisColumn + 2}`;
  }
}
