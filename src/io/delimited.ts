import { TankhueError, quoted } from '../errors.ts';
import { Captions } from './captions.ts';
import type { Encoding } from './decodeText.ts';
import { findNumberBlock, strictlyMonotonic, withoutUnit, type NumberBlock } from './numberBlock.ts';
import { numberFromText } from './numberText.ts';
import type { Layout, ReadOptions } from './readOptions.ts';
import { cellsOfBlock, RowCollector } from './tableRows.ts';
import {
  spectraFromColumns,
  spectraFromPairs,
  spectraFromRows,
  type AxisAlong,
  type TableSpectra,
} from './tableSpectra.ts';
import type { TableStore } from './tableStore.ts';
import type { SpectraRead } from './understood.ts';

/** Lines and characters that are looked at before separator, decimal mark and layout are decided. */
const HEAD_LINES = 2000;
const HEAD_CHARACTERS = 1 << 20;
const FEWEST_HEAD_LINES = 5;

function headOf(lines: Iterator<string>): string[] {
  const head: string[] = [];
  let characters = 0;
  while (head.length < HEAD_LINES && (characters < HEAD_CHARACTERS || head.length < FEWEST_HEAD_LINES)) {
    const next = lines.next();
    if (next.done) break;
    head.push(next.value);
    characters += next.value.length;
  }
  return head;
}

/** Rows above a bad line that the block has lost at its top are looked for so far up. */
const MOST_LOST = 5;

/**
 * The block may have been cut short at its top by a bad line. Rows above it whose axis value is where the axis would have it belong to
 * the block, so that the bad line is shown and not taken for a caption.
 */
function firstRow(head: readonly string[], block: NumberBlock): number {
  if (block.orientation === 'rows') return block.first;
  const axisAt = (line: number): number => {
    const cells = cellsOfBlock(head[line] ?? '', block);
    return cells.length === block.cells ? numberFromText(cells[0]!, block.decimal) : NaN;
  };
  const start = axisAt(block.first);
  const step = axisAt(block.first + 1) - start;
  let first = block.first;
  for (let i = block.first - 1; i >= Math.max(0, block.first - MOST_LOST); i--) {
    const steps = (start - axisAt(i)) / step;
    if (steps > 0.5 && steps < 2 * (block.first - i)) first = i;
  }
  return first;
}

function axisAlong(text: string, line: number, block: NumberBlock, file: string): AxisAlong {
  const cells = cellsOfBlock(text, block);
  const values = Float64Array.from(cells.slice(block.labels), (cell, i) => {
    const value = numberFromText(withoutUnit(cell), block.decimal);
    if (!Number.isNaN(value)) return value;
    throw new TankhueError(
      'not-a-number',
      `expected a wavelength with a decimal ${block.decimal}; received ${quoted(cell)}`,
      `${file}:${line}:${block.labels + i + 1}`,
      'mend the first line of numbers',
    );
  });
  return { values, corner: cells[0]!, line, labels: block.labels };
}

const isAxisLike = (values: Float64Array): boolean =>
  values.length >= 2 && Math.min(values[0]!, values.at(-1)!) >= 100 && strictlyMonotonic(values);

/**
 * One axis, or an axis in every other column: read off the columns that rise or fall all the way.
 * @throws TankhueError `layout` where they fit neither
 */
function columnsOrPairs(store: TableStore, captions: Captions, file: string, options: ReadOptions): Layout {
  if (options.layout) return options.layout;
  if (store.width < 4) return 'columns';
  const all = Array.from({ length: store.width }, (_, i) => i);
  const even = all.filter((i) => i % 2 === 0);
  const alternate = store.width % 2 === 0;
  const named = all.filter((i) => captions.axisUnit(i) !== null);
  if (named.length === 1 && all.every((i) => captions.of(i).length > 0)) return 'columns';
  if (alternate && even.every((i) => named.includes(i))) return 'pairs';
  const axes = all.filter((i) => isAxisLike(store.column(i).filter((value) => !Number.isNaN(value))));
  const second = axes.find((i) => i !== 0);
  if (second === undefined) return 'columns';
  if (alternate && axes.length === even.length && axes.every((i) => i % 2 === 0)) return 'pairs';
  throw new TankhueError(
    'layout',
    `expected one axis, or an axis in every other column; received columns ${axes.map((i) => i + 1).join(', ')} of ${store.width} that rise or fall like one`,
    `${file}:${store.line(0)}:${second + 1}`,
    'say --layout columns (one axis, then values) or --layout pairs (axis, values, axis, values)',
  );
}

/**
 * Spectra from lines of numbers in any dialect and layout. Numbers are kept, text is not, so that a file may be long.
 * @throws TankhueError, TankhueErrors for what cannot be read, and for what can be read in two ways
 */
export function parseDelimited(
  lines: Iterable<string>,
  file: string,
  encoding: Encoding,
  options: ReadOptions,
): SpectraRead {
  const iterator = lines[Symbol.iterator]();
  const head = headOf(iterator);
  const block = findNumberBlock(head, file, options);
  const first = firstRow(head, block);
  const isAlong = block.orientation === 'rows';
  const captions = new Captions(head.slice(0, first), block.separator, block.cells);
  const collector = new RowCollector(file, block);
  let number = isAlong ? first + 1 : first;
  for (const line of head.slice(number)) collector.take(line, ++number);
  for (let next = iterator.next(); !next.done; next = iterator.next()) collector.take(next.value, ++number);
  const { store } = collector;
  const layout = isAlong ? 'rows' : columnsOrPairs(store, captions, file, options);
  const { labels, footerLines } = collector.finish(layout === 'pairs');
  const source = { file, store, captions, options };
  let read: TableSpectra;
  if (isAlong) read = spectraFromRows(source, axisAlong(head[first]!, first + 1, block, file), labels);
  else read = layout === 'pairs' ? spectraFromPairs(source) : spectraFromColumns(source);
  return {
    spectra: read.spectra,
    understood: {
      format: 'delimited text',
      encoding,
      layout,
      separator: block.separator,
      decimal: block.decimal,
      headerLines: first,
      footerLines,
      spectra: read.understood,
      leftOut: read.leftOut,
      assumed: [...read.assumed],
      stated: {},
    },
  };
}
