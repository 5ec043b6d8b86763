// What        The row solver as machine code made for one model: averages, projections, Gauss-Newton, uncertainty, χ².
// Equation    as in `kernel.ts` and `rowSolver.ts`, sums written out for this number of amounts.
// Why so      Three to four times as fast as the same in JavaScript: two numbers to an instruction, no bounds to check, no loops of four.
//             It does the plain case only, undamped steps from the linear solution; a row for which that is not enough is left to
//             `rowSolver.ts`, so that there is one place where a hard case is decided.
// Valid for   one-to-one complexes and weak limits of second order; where there is no WebAssembly SIMD there is no fast path.
// Units       those of `rowSolver.ts`.
// Source      ours.
import { f64, flow, i32, Locals, pair, wasmModule, type Code } from '../numerics/wasmAssembler.ts';
import { FINISHED, ROUNDING, SUSPICIOUS, type KernelMatrices } from './kernel.ts';
import type { ClosedTerm } from './kernelAmounts.ts';
import type { AxisMap } from './kernelAxis.ts';
import type { Whitening } from './prepare.ts';

/** Everything about a model, a cuvette and an axis that the code is made for. */
export interface FastModel {
  readonly map: AxisMap;
  /** points of the caller's axis */
  readonly points: number;
  /** 2k rows as long as there are used grid points */
  readonly projector: readonly Float64Array[];
  readonly matrices: KernelMatrices;
  readonly terms: readonly ClosedTerm[];
  readonly designInverse: Float64Array;
  readonly whitening: Whitening;
  readonly pathLength: number;
  readonly pathPrecision: number;
  readonly shiftPrecision: number;
  readonly betweenGroup: { readonly share: number; readonly total: number };
}

/** Which results are wanted, one bit each. */
export const WANTED = { share: 1, total: 2, chiSquare: 4 } as const;

export interface FastRows {
  /** rows that fit at once */
  readonly rows: number;
  /** rows × points, to be filled before `run` */
  readonly input: Float64Array;
  /** 0 where the row was solved */
  readonly left: Float64Array;
  readonly lower: Float64Array;
  readonly higher: Float64Array;
  readonly shareUncertainty: Float64Array;
  readonly totalUncertainty: Float64Array;
  readonly chiSquare: Float64Array;
  run(rows: number, wanted: number): void;
}

/** Rows at once: their readings should stay in the cache next to the processor. */
const BLOCK_BYTES = 1 << 17;
const MOST_STEPS = 12;
const PAGE = 1 << 16;

/** @returns null where the engine that runs this has no SIMD, or the windows are odd */
export function fastRows(model: FastModel): FastRows | null {
  if (typeof WebAssembly === 'undefined' || model.map.width % 2 !== 0) return null;
  const layout = layoutOf(model);
  const memory = new WebAssembly.Memory({ initial: Math.ceil(layout.bytes / PAGE) });
  const code = compiled(codeFor(model, layout));
  if (!code) return null;
  const instance = new WebAssembly.Instance(code, { functions: { exp: Math.exp }, memory: { memory } });
  const numbers = (at: number, count: number): Float64Array => new Float64Array(memory.buffer, at, count);
  fill(model, layout, numbers, new Int32Array(memory.buffer, layout.start, model.map.start.length));
  return {
    rows: layout.rows,
    input: numbers(layout.input, layout.rows * model.points),
    left: numbers(layout.left, layout.rows),
    lower: numbers(layout.lower, layout.rows),
    higher: numbers(layout.higher, layout.rows),
    shareUncertainty: numbers(layout.shareUncertainty, layout.rows),
    totalUncertainty: numbers(layout.totalUncertainty, layout.rows),
    chiSquare: numbers(layout.chiSquare, layout.rows),
    run: instance.exports['run'] as FastRows['run'],
  };
}

/** Null where there is no SIMD, or a page forbids code made at run time or so much of it at once: the plain solver serves as well. */
function compiled(bytes: Uint8Array<ArrayBuffer>): WebAssembly.Module | null {
  try {
    return new WebAssembly.Module(bytes);
  } catch {
    return null;
  }
}

/** Byte addresses. */
interface Layout {
  readonly gram: number;
  readonly both: number;
  readonly cross: number;
  readonly shifted: number;
  readonly inverse: number;
  readonly design: number;
  readonly projector: number;
  readonly weight: number;
  readonly start: number;
  readonly means: number;
  readonly directions: number;
  readonly input: number;
  readonly left: number;
  readonly lower: number;
  readonly higher: number;
  readonly shareUncertainty: number;
  readonly totalUncertainty: number;
  readonly chiSquare: number;
  readonly bytes: number;
  readonly rows: number;
  /** used grid points, and those with zeros behind them up to a multiple of four */
  readonly count: number;
  readonly padded: number;
}

function layoutOf({ map, points, projector, terms, whitening }: FastModel): Layout {
  const k = 2 + terms.length;
  const count = map.start.length;
  const padded = Math.ceil(count / 4) * 4;
  const rows = Math.max(1, Math.floor(BLOCK_BYTES / (8 * points)));
  let bytes = 0;
  const take = (numbers: number): number => {
    const at = bytes;
    bytes += 16 * Math.ceil(numbers / 2);
    return at;
  };
  return {
    gram: take(k * k),
    both: take(k * k),
    cross: take(k * k),
    shifted: take(k * k),
    inverse: take(k * k),
    design: take(k * k),
    projector: take(count * projector.length),
    weight: take(count * map.width),
    start: take(count),
    means: take(padded),
    directions: take(padded * whitening.directions.length),
    input: take(rows * points),
    left: take(rows),
    lower: take(rows),
    higher: take(rows),
    shareUncertainty: take(rows),
    totalUncertainty: take(rows),
    chiSquare: take(rows),
    bytes,
    rows,
    count,
    padded,
  };
}

function fill(
  { map, projector, matrices, designInverse, whitening }: FastModel,
  layout: Layout,
  numbers: (at: number, count: number) => Float64Array,
  start: Int32Array,
): void {
  const put = (at: number, values: Float64Array): void => numbers(at, values.length).set(values);
  put(layout.gram, matrices.gram);
  put(layout.both, matrices.both);
  put(layout.cross, matrices.cross);
  put(layout.shifted, matrices.gramShifted);
  put(layout.inverse, matrices.inverse);
  put(layout.design, designInverse);
  put(layout.weight, map.weight);
  map.start.forEach((first, l) => (start[l] = 8 * first));
  const flat = numbers(layout.projector, layout.count * projector.length);
  projector.forEach((row, j) => row.forEach((value, l) => (flat[l * projector.length + j] = value)));
  whitening.directions.forEach((direction, j) => {
    // |Σ^(−½)x|² = (|x|² − Σ (1 − keep²)(u·x)²)/σ²: the factor goes into the direction.
    const keep = 1 - whitening.shrink[j]!;
    const factor = Math.sqrt(1 - keep * keep);
    put(
      layout.directions + 8 * layout.padded * j,
      direction.map((value) => factor * value),
    );
  });
}

const at = (address: number): Code => i32.constant(address);
const squared = (name: Code): Code => f64.mul(name, name);

/** The whole function: for each row averages and projections, the descent, the results. */
function codeFor(model: FastModel, layout: Layout): Uint8Array<ArrayBuffer> {
  const locals = new Locals([
    ['rows', 'i32'],
    ['wanted', 'i32'],
  ]);
  const { get, set } = accessTo(locals);
  const declare = [
    set('r', i32.constant(0), 'i32'),
    set('row', at(layout.input), 'i32'),
    set('out', i32.constant(0), 'i32'),
  ];
  const body = flow.sequence([
    ...declare,
    flow.loop(
      flow.sequence([
        // Left to the plain solver until it is solved.
        f64.store(get('out'), f64.constant(1), layout.left),
        flow.block(
          flow.sequence([
            projections(model, layout, locals),
            linearStart(model, layout, locals),
            flow.exitIf(i32.not(f64.less(f64.abs(get('linear')), f64.constant(Infinity))), 0),
            flow.exitIf(i32.not(f64.greater(f64.add(get('a'), get('b')), f64.constant(0))), 0),
            descent(model, layout, locals),
            flow.exitIf(i32.not(f64.atMost(f64.sub(get('objective'), get('linear')), f64.constant(SUSPICIOUS))), 0),
            results(model, layout, locals),
            f64.store(get('out'), f64.constant(0), layout.left),
          ]),
        ),
        set('row', i32.add(get('row'), i32.constant(8 * model.points)), 'i32'),
        set('out', i32.add(get('out'), i32.constant(8)), 'i32'),
        set('r', i32.add(get('r'), i32.constant(1)), 'i32'),
        flow.exitIf(i32.less(get('r'), get('rows')), 0),
      ]),
    ),
  ]);
  return wasmModule(['exp'], locals, body);
}

const accessTo = (locals: Locals) => ({
  get: (name: string): Code => locals.get(name),
  set: (name: string, value: Code, type?: 'f64' | 'i32' | 'v128'): Code => locals.set(name, value, type),
});

/** Means of the windows, each at once multiplied into all projections; means are kept for χ². */
function projections({ map, projector }: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const all = Array.from({ length: projector.length / 2 }, (_, j) => j);
  const step = (name: string, bytes: number): Code => set(name, i32.add(get(name), i32.constant(bytes)), 'i32');
  const begin = [
    ...all.map((j) => set(`sum${j}`, pair.zero, 'v128')),
    set('weightAt', at(layout.weight), 'i32'),
    set('startAt', at(layout.start), 'i32'),
    set('meanAt', at(layout.means), 'i32'),
    set('rowAt', at(layout.projector), 'i32'),
    set('from', i32.constant(0), 'i32'),
  ];
  const window = Array.from({ length: map.width / 2 }, (_, i) =>
    pair.mul(pair.load(get('weightAt'), 16 * i), pair.load(get('from'), 16 * i)),
  ).reduce((a, b) => pair.add(a, b));
  return flow.sequence([
    ...begin,
    flow.loop(
      flow.sequence([
        set('from', i32.add(get('row'), i32.load(get('startAt'))), 'i32'),
        set('window', window, 'v128'),
        set('mean', f64.add(pair.first(get('window')), pair.second(get('window')))),
        f64.store(get('meanAt'), get('mean')),
        set('twice', pair.twice(get('mean')), 'v128'),
        ...all.map((j) =>
          set(`sum${j}`, pair.add(get(`sum${j}`), pair.mul(get('twice'), pair.load(get('rowAt'), 16 * j))), 'v128'),
        ),
        step('weightAt', 8 * map.width),
        step('startAt', 4),
        step('meanAt', 8),
        step('rowAt', 8 * projector.length),
        flow.exitIf(i32.less(get('meanAt'), at(layout.means + 8 * layout.count)), 0),
      ]),
    ),
    ...all.flatMap((j) => [
      set(`w${2 * j}`, pair.first(get(`sum${j}`))),
      set(`w${2 * j + 1}`, pair.second(get(`sum${j}`))),
    ]),
  ]);
}

const indices = (count: number): number[] => Array.from({ length: count }, (_, i) => i);

/** G⁻¹w: the two totals where amounts of complexes are free, and the misfit it reaches. */
function linearStart({ terms, pathLength }: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const k = 2 + terms.length;
  const amount = (i: number): Code =>
    f64.sum(indices(k).map((j) => f64.mul(f64.load(at(layout.inverse + 8 * (i * k + j))), get(`w${j}`))));
  return flow.sequence([
    ...indices(k).map((i) => set(`free${i}`, amount(i))),
    set('linear', f64.negate(f64.sum(indices(k).map((i) => f64.mul(get(`free${i}`), get(`w${i}`)))))),
    set('a', f64.div(get('free0'), f64.constant(pathLength))),
    set('b', f64.div(get('free1'), f64.constant(pathLength))),
    set('s', f64.constant(0)),
    set('d', f64.constant(0)),
  ]);
}

/** Amounts y2 … of the complexes with their derivatives p, q by a and b. */
function complexes(terms: readonly ClosedTerm[], locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const [a, b] = [get('a'), get('b')];
  const two = f64.constant(2);
  return flow.sequence(
    terms.flatMap(({ dissociation, lowerOrder }, term) => {
      const j = term + 2;
      if (dissociation > 0) {
        const D = f64.constant(dissociation);
        const underRoot = f64.add(squared(f64.sub(a, b)), f64.mul(f64.add(f64.mul(two, f64.add(a, b)), D), D));
        return [
          set('root', f64.sqrt(f64.max(underRoot, f64.constant(1e-300)))),
          set(`y${j}`, f64.div(f64.product(two, a, b), f64.sum([a, b, D, get('root')]))),
          set(`p${j}`, f64.div(f64.sub(b, get(`y${j}`)), get('root'))),
          set(`q${j}`, f64.div(f64.sub(a, get(`y${j}`)), get('root'))),
        ];
      }
      const zero = f64.constant(0);
      if (lowerOrder === 1) return [set(`y${j}`, f64.mul(a, b)), set(`p${j}`, b), set(`q${j}`, a)];
      const own = lowerOrder === 2 ? a : b;
      const slope = f64.mul(two, own);
      return [
        set(`y${j}`, squared(own)),
        set(`p${j}`, lowerOrder === 2 ? slope : zero),
        set(`q${j}`, lowerOrder === 2 ? zero : slope),
      ];
    }),
  );
}

/** Objective, −½ gradient and Gauss-Newton matrix at (a, b, s, d): the sums of `kernel.ts`. */
function evaluation(
  { terms, pathLength, pathPrecision, shiftPrecision }: FastModel,
  layout: Layout,
  locals: Locals,
): Code {
  const { get, set } = accessTo(locals);
  const k = 2 + terms.length;
  const all = indices(k);
  const extra = all.slice(2);
  const entry = (matrix: number, i: number, j: number): Code => f64.load(at(matrix + 8 * (i * k + j)));
  const y = (j: number): Code => get(j === 0 ? 'a' : j === 1 ? 'b' : `y${j}`);
  const times = (matrix: number, i: number): Code => f64.sum(all.map((j) => f64.mul(entry(matrix, i, j), y(j))));
  const overall = (of: (i: number) => Code): Code => f64.sum(all.map((i) => f64.mul(y(i), of(i))));
  const d = (): Code => get('d');
  const code: Code[] = [complexes(terms, locals)];
  const keep = (name: string, value: Code): Code => {
    code.push(set(name, value));
    return get(name);
  };
  code.push(
    set('c', f64.constant(pathLength)),
    flow.when(
      i32.not(f64.equal(get('s'), f64.constant(0))),
      set('c', f64.mul(f64.constant(pathLength), flow.call(0, [get('s')]))),
    ),
  );
  const c = get('c');
  for (const i of all) {
    const shifted = keep(`shifted${i}`, times(layout.shifted, i));
    keep(`t${i}`, f64.add(times(layout.cross, i), f64.mul(d(), shifted)));
    const inShift = f64.add(times(layout.both, i), f64.mul(d(), shifted));
    keep(`h${i}`, f64.add(times(layout.gram, i), f64.mul(d(), inShift)));
    keep(`z${i}`, f64.add(get(`w${i}`), f64.mul(d(), get(`w${k + i}`))));
    keep(`r${i}`, f64.sub(get(`z${i}`), f64.mul(c, get(`h${i}`))));
  }
  const fitted = keep(
    'fitted',
    overall((i) => get(`z${i}`)),
  );
  const norm = keep(
    'norm',
    overall((i) => get(`h${i}`)),
  );
  const tilt = keep(
    'tilt',
    overall((i) => get(`t${i}`)),
  );
  const byShift = keep(
    'byShift',
    overall((i) => get(`w${k + i}`)),
  );
  const curve = keep(
    'curve',
    overall((i) => get(`shifted${i}`)),
  );
  /** derivative by a (of p, 0) or b (of q, 1) of Σ y_i of_i */
  const along = (slope: 'p' | 'q', of: (i: number) => Code): Code =>
    f64.sum([of(slope === 'p' ? 0 : 1), ...extra.map((i) => f64.mul(get(`${slope}${i}`), of(i)))]);
  /** Rows of the tilted Gram matrix along a derivative. */
  const tilted = (i: number, j: number): Code => get(`T${Math.max(i, j)}${Math.min(i, j)}`);
  for (const i of all)
    for (const j of indices(i + 1))
      keep(
        `T${i}${j}`,
        f64.add(
          entry(layout.gram, i, j),
          f64.mul(d(), f64.add(entry(layout.both, i, j), f64.mul(d(), entry(layout.shifted, i, j)))),
        ),
      );
  for (const i of all) {
    keep(
      `u${i}`,
      along('p', (j) => tilted(i, j)),
    );
    keep(
      `v${i}`,
      along('q', (j) => tilted(i, j)),
    );
  }
  const cc = keep('cc', squared(c));
  const path = f64.constant(pathPrecision);
  const shift = f64.constant(shiftPrecision);
  keep(
    'g0',
    f64.mul(
      c,
      along('p', (i) => get(`r${i}`)),
    ),
  );
  keep(
    'g1',
    f64.mul(
      c,
      along('q', (i) => get(`r${i}`)),
    ),
  );
  keep('g2', f64.sub(f64.mul(c, f64.sub(fitted, f64.mul(c, norm))), f64.mul(path, get('s'))));
  keep('g3', f64.sub(f64.mul(c, f64.sub(byShift, f64.mul(c, tilt))), f64.mul(shift, d())));
  keep(
    'm00',
    f64.mul(
      cc,
      along('p', (i) => get(`u${i}`)),
    ),
  );
  keep(
    'm10',
    f64.mul(
      cc,
      along('q', (i) => get(`u${i}`)),
    ),
  );
  keep(
    'm11',
    f64.mul(
      cc,
      along('q', (i) => get(`v${i}`)),
    ),
  );
  keep(
    'm20',
    f64.mul(
      cc,
      along('p', (i) => get(`h${i}`)),
    ),
  );
  keep(
    'm21',
    f64.mul(
      cc,
      along('q', (i) => get(`h${i}`)),
    ),
  );
  keep('m22', f64.add(f64.mul(cc, norm), path));
  keep(
    'm30',
    f64.mul(
      cc,
      along('p', (i) => get(`t${i}`)),
    ),
  );
  keep(
    'm31',
    f64.mul(
      cc,
      along('q', (i) => get(`t${i}`)),
    ),
  );
  keep('m32', f64.mul(cc, tilt));
  keep('m33', f64.add(f64.mul(cc, curve), shift));
  keep(
    'objective',
    f64.sum([
      f64.mul(c, f64.sub(f64.mul(c, norm), f64.mul(f64.constant(2), fitted))),
      f64.mul(path, squared(get('s'))),
      f64.mul(shift, squared(d())),
    ]),
  );
  return flow.sequence(code);
}

/** Cholesky factor of m, its diagonal inverted, in l; leaves the row when m is not positive definite. */
function factorisation(leave: number, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const code: Code[] = [];
  for (const i of indices(4))
    for (const j of indices(i + 1)) {
      const rest = indices(j).reduce(
        (sum, n) => f64.sub(sum, f64.mul(get(`l${i}${n}`), get(`l${j}${n}`))),
        get(`m${i}${j}`),
      );
      if (i !== j) code.push(set(`l${i}${j}`, f64.mul(rest, get(`l${j}${j}`))));
      else
        code.push(
          set('pivot', rest),
          flow.exitIf(i32.not(f64.greater(get('pivot'), f64.constant(0))), leave),
          set(`l${i}${i}`, f64.div(f64.constant(1), f64.sqrt(get('pivot')))),
        );
    }
  return flow.sequence(code);
}

/** Solves for a right-hand side; the answer is in x0 … x3. */
function solution(of: (i: number) => Code, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const forward = indices(4).map((i) =>
    set(
      `f${i}`,
      f64.mul(
        indices(i).reduce((sum, n) => f64.sub(sum, f64.mul(get(`l${i}${n}`), get(`f${n}`))), of(i)),
        get(`l${i}${i}`),
      ),
    ),
  );
  const code = [...forward];
  for (const i of [3, 2, 1, 0]) {
    const rest = [3, 2, 1]
      .filter((n) => n > i)
      .reduce((sum, n) => f64.sub(sum, f64.mul(get(`l${n}${i}`), get(`x${n}`))), get(`f${i}`));
    code.push(set(`x${i}`, f64.mul(rest, get(`l${i}${i}`))));
  }
  return flow.sequence(code);
}

/** Undamped Gauss-Newton; leaves the row (the block around it) where that does not do. */
function descent(model: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const begin = [
    set('before', f64.constant(0)),
    set('objectiveBefore', f64.constant(Number.MAX_VALUE)),
    set('count', i32.constant(0), 'i32'),
  ];
  const evaluate = evaluation(model, layout, locals);
  const slack = f64.mul(f64.constant(ROUNDING), f64.abs(get('objectiveBefore')));
  const rises = i32.not(f64.atMost(get('objective'), f64.add(get('objectiveBefore'), slack)));
  // Blocks around, from within the loop: 0 the loop, 1 done, 2 the row.
  const factor = factorisation(2, locals);
  const solve = solution((i) => get(`g${i}`), locals);
  const promise = f64.sum(indices(4).map((i) => f64.mul(get(`x${i}`), get(`g${i}`))));
  return flow.sequence([
    ...begin,
    flow.block(
      flow.sequence([
        flow.loop(
          flow.sequence([
            evaluate,
            flow.exitIf(rises, 2),
            factor,
            solve,
            set('promised', promise),
            ...(['a', 'b', 's', 'd'] as const).map((name, i) => set(name, f64.add(get(name), get(`x${i}`)))),
            set(
              'remaining',
              f64.mul(get('promised'), f64.min(f64.constant(1), f64.div(get('promised'), get('before')))),
            ),
            // Nothing promised, nothing before: 0 · (0/0) is not below, so the question is asked the other way round.
            flow.exitIf(i32.not(f64.atMost(f64.constant(FINISHED), get('remaining'))), 1),
            set('before', get('promised')),
            set('objectiveBefore', get('objective')),
            set('count', i32.add(get('count'), i32.constant(1)), 'i32'),
            flow.exitIf(i32.less(get('count'), i32.constant(MOST_STEPS)), 0),
          ]),
        ),
        flow.exit(1),
      ]),
    ),
  ]);
}

/** Concentrations, and what was asked for. */
function results(model: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const out = (address: number, value: Code): Code => f64.store(get('out'), value, address);
  const asked = (bit: number): Code => i32.and(get('wanted'), i32.constant(bit));
  return flow.sequence([
    out(layout.lower, get('a')),
    out(layout.higher, get('b')),
    set('whole', f64.add(get('a'), get('b'))),
    flow.when(
      asked(WANTED.share | WANTED.total),
      flow.sequence([leverage(model, layout, locals), uncertainties(model, layout, locals, asked)]),
    ),
    flow.when(
      asked(WANTED.chiSquare),
      flow.sequence([misfit(model, layout, locals), out(layout.chiSquare, get('chiSquare'))]),
    ),
  ]);
}

function leverage({ terms, pathLength }: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const k = 2 + terms.length;
  const y = (j: number): Code => get(j === 0 ? 'a' : j === 1 ? 'b' : `y${j}`);
  const form = f64.sum(
    indices(k).map((i) =>
      f64.mul(y(i), f64.sum(indices(k).map((j) => f64.mul(f64.load(at(layout.design + 8 * (i * k + j))), y(j))))),
    ),
  );
  return flow.sequence([
    complexes(terms, locals),
    set('leverage', f64.mul(f64.constant(pathLength * pathLength), form)),
  ]);
}

/** √(H⁻¹ + h H⁻¹IH⁻¹ along a derivative, and the between-group variance), as in `rowSolver.ts`. */
function uncertainties(
  { pathPrecision, shiftPrecision, betweenGroup }: FastModel,
  layout: Layout,
  locals: Locals,
  asked: (bit: number) => Code,
): Code {
  const { get, set } = accessTo(locals);
  const one = (bit: number, byLower: Code, byHigher: Code, between: Code, address: number): Code => {
    const derivatives = [byLower, byHigher, f64.constant(0), f64.constant(0)];
    const solved = solution((i) => derivatives[i]!, locals);
    const whole = set('variance', f64.add(f64.mul(byLower, get('x0')), f64.mul(byHigher, get('x1'))));
    const priors = f64.add(
      f64.mul(f64.constant(pathPrecision), squared(get('x2'))),
      f64.mul(f64.constant(shiftPrecision), squared(get('x3'))),
    );
    const spectral = f64.mul(get('leverage'), f64.sub(get('variance'), priors));
    return flow.when(
      asked(bit),
      flow.sequence([
        solved,
        whole,
        f64.store(get('out'), f64.sqrt(f64.sum([get('variance'), spectral, squared(between)])), address),
      ]),
    );
  };
  const square = squared(get('whole'));
  return flow.sequence([
    set('byLower', f64.negate(f64.div(get('b'), square))),
    set('byHigher', f64.div(get('a'), square)),
    one(WANTED.share, get('byLower'), get('byHigher'), f64.constant(betweenGroup.share), layout.shareUncertainty),
    one(
      WANTED.total,
      f64.constant(1),
      f64.constant(1),
      f64.mul(f64.constant(betweenGroup.total), get('whole')),
      layout.totalUncertainty,
    ),
  ]);
}

/** χ² of the solution: |Σ^(−½)x|² of the means and the objective, its priors taken out. */
function misfit({ whitening, pathPrecision, shiftPrecision }: FastModel, layout: Layout, locals: Locals): Code {
  const { get, set } = accessTo(locals);
  const step = (name: string, bytes: number): Code => set(name, i32.add(get(name), i32.constant(bytes)), 'i32');
  /** Σ over the means of mean × (mean, or the direction's entry), four at a time. */
  const overMeans = (other: 'meanAt' | 'directionAt'): Code => {
    const begin = flow.sequence([
      set('even', pair.zero, 'v128'),
      set('odd', pair.zero, 'v128'),
      set('meanAt', at(layout.means), 'i32'),
    ]);
    const term = (offset: number): Code => pair.mul(pair.load(get('meanAt'), offset), pair.load(get(other), offset));
    return flow.sequence([
      begin,
      flow.loop(
        flow.sequence([
          set('even', pair.add(get('even'), term(0)), 'v128'),
          set('odd', pair.add(get('odd'), term(16)), 'v128'),
          step('meanAt', 32),
          ...(other === 'directionAt' ? [step('directionAt', 32)] : []),
          flow.exitIf(i32.less(get('meanAt'), at(layout.means + 8 * layout.padded)), 0),
        ]),
      ),
      set('even', pair.add(get('even'), get('odd')), 'v128'),
      set('along', f64.add(pair.first(get('even')), pair.second(get('even')))),
    ]);
  };
  const whole = flow.sequence([overMeans('meanAt'), set('length', get('along'))]);
  const lastDirection = layout.directions + 8 * layout.padded * whitening.directions.length;
  const lessDirections = (): Code =>
    flow.sequence([
      set('directionAt', at(layout.directions), 'i32'),
      flow.loop(
        flow.sequence([
          overMeans('directionAt'),
          set('length', f64.sub(get('length'), squared(get('along')))),
          flow.exitIf(i32.less(get('directionAt'), at(lastDirection)), 0),
        ]),
      ),
    ]);
  const priors = f64.add(
    f64.mul(f64.constant(pathPrecision), squared(get('s'))),
    f64.mul(f64.constant(shiftPrecision), squared(get('d'))),
  );
  return flow.sequence([
    whole,
    ...(whitening.directions.length > 0 ? [lessDirections()] : []),
    set(
      'chiSquare',
      f64.max(
        f64.constant(0),
        f64.add(
          f64.div(get('length'), f64.constant(whitening.noise * whitening.noise)),
          f64.sub(get('objective'), priors),
        ),
      ),
    ),
  ]);
}
