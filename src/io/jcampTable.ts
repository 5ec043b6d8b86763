import { TankhueError, quoted } from '../errors.ts';
import { jcampNumber, type JcampBlock, type JcampLine } from './jcampBlocks.ts';
import { decodeLine } from './jcampOrdinates.ts';

/** Points of a table in the units of its records. */
export interface JcampPoints {
  readonly x: Float64Array;
  /** NaN where missing */
  readonly y: Float64Array;
  /** line of the file that each point stands on */
  readonly lines: readonly number[];
}

/** Part of a step by which an abscissa or DELTAX may be off: they are rounded. */
const STEP_TOLERANCE = 0.01;

interface Grid {
  readonly first: number;
  readonly step: number;
  readonly count: number;
}

const refusePoints = (expected: number, received: number, block: JcampBlock, where: string): TankhueError =>
  new TankhueError(
    'points-missing',
    `expected ${expected} points (NPOINTS, line ${block.records.get('NPOINTS')!.line}); received ${received} before ##END`,
    where,
    'export the spectrum again; nothing was stretched or filled in',
  );

/** @throws TankhueError `record-missing`, `check-failed` */
function gridOf(block: JcampBlock, file: string, line: number): Grid {
  const first = jcampNumber(block, 'FIRSTX', file);
  const last = jcampNumber(block, 'LASTX', file);
  const count = jcampNumber(block, 'NPOINTS', file);
  const delta = jcampNumber(block, 'DELTAX', file);
  if (first === null || count === null || (last === null && delta === null))
    throw new TankhueError(
      'record-missing',
      'expected ##FIRSTX=, ##LASTX= (or ##DELTAX=) and ##NPOINTS= before the table; received not all of them',
      `${file}:${line}:1`,
      'export the spectrum again',
    );
  const step = last !== null && count > 1 ? (last - first) / (count - 1) : (delta ?? NaN);
  if (!(Math.abs(step) > 0))
    throw new TankhueError(
      'check-failed',
      `expected a step between points; received FIRSTX ${first}, LASTX ${last}, NPOINTS ${count}`,
      `${file}:${block.records.get('NPOINTS')!.line}:1`,
      'export the spectrum again',
    );
  if (delta !== null && Math.abs(delta - step) > STEP_TOLERANCE * Math.abs(step))
    throw new TankhueError(
      'check-failed',
      `expected a step of ${step} (FIRSTX, LASTX, NPOINTS); received DELTAX ${delta}`,
      `${file}:${block.records.get('DELTAX')!.line}:1`,
      'one of the four is wrong: export the spectrum again; nothing was stretched',
    );
  return { first, step, count };
}

function decoded(
  { text, line }: JcampLine,
  file: string,
): Exclude<ReturnType<typeof decodeLine>, { unreadable: string }> {
  const result = decodeLine(text);
  if (!('unreadable' in result)) return result;
  throw new TankhueError(
    'not-a-number',
    `expected an abscissa and ordinates; received ${result.unreadable}`,
    `${file}:${line}:1`,
    'export the spectrum again',
  );
}

function checkAbscissa(found: number, expected: number, step: number, where: string): void {
  if (Math.abs(found - expected) <= 0.5 * Math.abs(step)) return;
  throw new TankhueError(
    'check-failed',
    `expected the abscissa ${Number(expected.toPrecision(8))} on this line; received ${found}`,
    where,
    'points are missing or doubled before this line: export the spectrum again; nothing was stretched',
  );
}

function checkOrdinate(found: number | undefined, expected: number, where: string): void {
  if (found === expected || (Number.isNaN(found) && Number.isNaN(expected))) return;
  throw new TankhueError(
    'check-failed',
    `expected the check ordinate ${expected}; received ${found ?? 'none'}`,
    where,
    'this line or the one before is damaged: export the spectrum again',
  );
}

function checkFirst(block: JcampBlock, y: number, yFactor: number, file: string): void {
  const stated = jcampNumber(block, 'FIRSTY', file);
  if (stated === null || Number.isNaN(y) || Math.abs(stated - y) <= 0.51 * Math.abs(yFactor) + 1e-4 * Math.abs(stated))
    return;
  throw new TankhueError(
    'check-failed',
    `expected ${stated} as first ordinate (FIRSTY); received ${y}`,
    `${file}:${block.records.get('FIRSTY')!.line}:1`,
    'YFACTOR or FIRSTY is wrong: export the spectrum again',
  );
}

/** (X++(Y..Y)): each line's abscissa is checked against FIRSTX and the step, each difference line against the one before. */
function evenlySpaced(block: JcampBlock, file: string): JcampPoints {
  const table = block.table!.lines;
  const xFactor = jcampNumber(block, 'XFACTOR', file) ?? 1;
  const yFactor = jcampNumber(block, 'YFACTOR', file) ?? 1;
  const { first, step, count } = gridOf(block, file, table[0]?.line ?? 1);
  const raw: number[] = [];
  const lines: number[] = [];
  let expectsCheck = false;
  for (const line of table) {
    const where = `${file}:${line.line}:1`;
    const { x, ordinates, endsInDifference } = decoded(line, file);
    checkAbscissa(x * xFactor, first + step * (raw.length - (expectsCheck ? 1 : 0)), step, where);
    if (expectsCheck) checkOrdinate(ordinates.shift(), raw.at(-1)!, where);
    for (const ordinate of ordinates) {
      raw.push(ordinate);
      lines.push(line.line);
    }
    expectsCheck = endsInDifference;
  }
  if (raw.length !== count) throw refusePoints(count, raw.length, block, `${file}:${table.at(-1)?.line ?? 1}:1`);
  const y = Float64Array.from(raw, (value) => value * yFactor);
  checkFirst(block, y[0]!, yFactor, file);
  return { x: Float64Array.from(raw, (_, i) => first + step * i), y, lines };
}

/** (XY..XY): pairs, each with its own abscissa. */
function freelySpaced(block: JcampBlock, file: string): JcampPoints {
  const table = block.table!.lines;
  const xFactor = jcampNumber(block, 'XFACTOR', file) ?? 1;
  const yFactor = jcampNumber(block, 'YFACTOR', file) ?? 1;
  const x: number[] = [];
  const y: number[] = [];
  const lines: number[] = [];
  for (const { text, line } of table) {
    const cells = text.split(/[\s,;]+/).filter(Boolean);
    if (
      cells.length % 2 === 1 ||
      cells.some((cell, i) => !(i % 2 === 1 && cell === '?') && !Number.isFinite(Number(cell)))
    )
      throw new TankhueError(
        'not-a-number',
        `expected pairs of numbers; received ${quoted(text)}`,
        `${file}:${line}:1`,
        'export the spectrum again',
      );
    for (let i = 0; i < cells.length; i += 2) {
      x.push(Number(cells[i]) * xFactor);
      y.push(cells[i + 1] === '?' ? NaN : Number(cells[i + 1]) * yFactor);
      lines.push(line);
    }
  }
  const count = jcampNumber(block, 'NPOINTS', file);
  if (count !== null && count !== x.length)
    throw refusePoints(count, x.length, block, `${file}:${table.at(-1)?.line ?? 1}:1`);
  for (const [label, value] of [
    ['FIRSTX', x[0]],
    ['LASTX', x.at(-1)],
  ] as const) {
    const stated = jcampNumber(block, label, file);
    if (stated === null || value === undefined || Math.abs(stated - value) <= 1e-3 * Math.abs(stated)) continue;
    throw new TankhueError(
      'check-failed',
      `expected ${stated} (${label}); received ${value}`,
      `${file}:${block.records.get(label)!.line}:1`,
      'export the spectrum again; nothing was stretched',
    );
  }
  if (y.length > 0) checkFirst(block, y[0]!, yFactor, file);
  return { x: Float64Array.from(x), y: Float64Array.from(y), lines };
}

/**
 * Points of a block's table, every check of the standard made.
 * @throws TankhueError `record-missing`, `check-failed`, `points-missing`, `not-a-number`
 */
export const jcampPoints = (block: JcampBlock, file: string): JcampPoints =>
  block.table!.label === 'XYDATA' ? evenlySpaced(block, file) : freelySpaced(block, file);
