import fc from 'fast-check';
import { expect, test } from 'vitest';
import { f64, flow, i32, Locals, pair, wasmModule, type Code } from '../../src/numerics/wasmAssembler.ts';

/** Runs code that may read numbers from 0 on and leaves its answer at byte 256. */
function answerOf(body: (locals: Locals) => Code, inputs: readonly number[]): number {
  const memory = new WebAssembly.Memory({ initial: 1 });
  const numbers = new Float64Array(memory.buffer);
  numbers.set(inputs);
  const locals = new Locals([['n', 'i32']]);
  const module = new WebAssembly.Module(wasmModule(['exp'], locals, body(locals)));
  const { exports } = new WebAssembly.Instance(module, { functions: { exp: Math.exp }, memory: { memory } });
  (exports['run'] as (n: number) => void)(inputs.length);
  return numbers[32]!;
}
const number = (i: number): Code => f64.load(i32.constant(8 * i));
const answer = (value: Code): Code => f64.store(i32.constant(0), value, 256);
const finite = fc.double({ min: -1e6, max: 1e6, noNaN: true });

test.each<[string, (a: Code, b: Code) => Code, (a: number, b: number) => number]>([
  ['a + b', f64.add, (a, b) => a + b],
  ['a − b', f64.sub, (a, b) => a - b],
  ['a · b', f64.mul, (a, b) => a * b],
  ['a / b', f64.div, (a, b) => a / b],
  ['min', f64.min, Math.min],
  ['max', f64.max, Math.max],
  ['√|a|', (a) => f64.sqrt(f64.abs(a)), (a) => Math.sqrt(Math.abs(a))],
  ['exp(a/1e6)', (a) => flow.call(0, [f64.div(a, f64.constant(1e6))]), (a) => Math.exp(a / 1e6)],
])('%s as JavaScript has it', (_, code, expected) => {
  fc.assert(
    fc.property(finite, finite, (a, b) => {
      expect(answerOf(() => answer(code(number(0), number(1))), [a, b])).toBe(expected(a, b));
    }),
    { numRuns: 30 },
  );
});

test('a loop adds pairs of numbers', () => {
  const inputs = Array.from({ length: 16 }, (_, i) => i + 0.25);
  const sum = (locals: Locals): Code => {
    const begin = [locals.set('at', i32.constant(0), 'i32'), locals.set('sum', pair.zero, 'v128')];
    const at = locals.get('at');
    return flow.sequence([
      ...begin,
      flow.loop(
        flow.sequence([
          locals.set('sum', pair.add(locals.get('sum'), pair.mul(pair.load(at), pair.twice(f64.constant(2)))), 'v128'),
          locals.set('at', i32.add(at, i32.constant(16)), 'i32'),
          flow.exitIf(i32.less(at, i32.constant(128)), 0),
        ]),
      ),
      answer(f64.add(pair.first(locals.get('sum')), pair.second(locals.get('sum')))),
    ]);
  };
  expect(answerOf(sum, inputs)).toBe(2 * inputs.reduce((a, b) => a + b));
});

test('when and otherwise, blocks left early', () => {
  const sign = (locals: Locals): Code =>
    flow.sequence([
      answer(f64.constant(7)),
      flow.block(
        flow.sequence([
          flow.exitIf(f64.equal(number(0), f64.constant(0)), 0),
          flow.when(f64.less(number(0), f64.constant(0)), answer(f64.constant(-1)), answer(f64.constant(1))),
        ]),
      ),
      locals.set('unused', f64.constant(0)),
    ]);
  expect([-5, 0, 5].map((value) => answerOf(sign, [value]))).toEqual([-1, 7, 1]);
});

test.each([[0], [63], [64], [-64], [-65], [127], [128], [65_536], [2 ** 31 - 1], [-(2 ** 31)]])(
  'the whole number %s is written as it is',
  (value) => {
    const stored = answerOf(() => i32.store(i32.constant(256), i32.constant(value)), []);
    expect(new Int32Array(Float64Array.of(stored).buffer)[0]).toBe(value);
  },
);

test('a name that nobody set is a mistake of the writer', () => {
  expect(() => new Locals([]).get('x')).toThrow('no local x');
});
