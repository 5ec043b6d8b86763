// What        A small assembler for WebAssembly: functions of numbers over one memory.
// Equation    –
// Why so      Code made for one size of a problem, all loops of four written out and two numbers to an instruction, is several times as
//             fast as JavaScript; made at run time it needs no toolchain, no binary in the repository and no build step.
// Valid for   WebAssembly 1 with fixed-width SIMD (every browser and Node since 2021).
// Units       –
// Source      WebAssembly Core Specification 2.0, section 5 (binary format).

/** Instructions in binary, leaving at most one value on the stack. */
export type Code = readonly number[];

const F64 = 0x7c;
const I32 = 0x7f;
const V128 = 0x7b;
const TYPES = { f64: F64, i32: I32, v128: V128 } as const;
export type ValueType = keyof typeof TYPES;

/** LEB128, unsigned. */
function unsigned(value: number): number[] {
  const bytes: number[] = [];
  let rest = value;
  do {
    const low = rest & 0x7f;
    rest >>>= 7;
    bytes.push(rest === 0 ? low : low | 0x80);
  } while (rest !== 0);
  return bytes;
}

/** LEB128, signed. */
function signed(value: number): number[] {
  const bytes: number[] = [];
  let rest = value | 0;
  for (;;) {
    const low = rest & 0x7f;
    rest >>= 7;
    const done = (rest === 0 && (low & 0x40) === 0) || (rest === -1 && (low & 0x40) !== 0);
    bytes.push(done ? low : low | 0x80);
    if (done) return bytes;
  }
}

const eightBytes = (value: number): number[] => [...new Uint8Array(Float64Array.of(value).buffer)];
const sequence = (parts: readonly Code[]): number[] => parts.flatMap((part) => [...part]);
const withLength = (bytes: Code): number[] => [...unsigned(bytes.length), ...bytes];
const vector = (items: readonly Code[]): number[] => [...unsigned(items.length), ...sequence(items)];
const binary =
  (opcode: Code) =>
  (a: Code, b: Code): Code => [...a, ...b, ...opcode];
const unary =
  (opcode: Code) =>
  (a: Code): Code => [...a, ...opcode];
const simd = (opcode: number): number[] => [0xfd, ...unsigned(opcode)];

const add = binary([0xa0]);
const mul = binary([0xa2]);

/** Numbers of 64 bits. Addresses are bytes; `offset` is added to them for nothing. */
export const f64 = {
  constant: (value: number): Code => [0x44, ...eightBytes(value)],
  load: (address: Code, offset = 0): Code => [...address, 0x2b, 3, ...unsigned(offset)],
  store: (address: Code, value: Code, offset = 0): Code => [...address, ...value, 0x39, 3, ...unsigned(offset)],
  add,
  sub: binary([0xa1]),
  mul,
  div: binary([0xa3]),
  min: binary([0xa4]),
  max: binary([0xa5]),
  sqrt: unary([0x9f]),
  abs: unary([0x99]),
  negate: unary([0x9a]),
  equal: binary([0x61]),
  less: binary([0x63]),
  greater: binary([0x64]),
  atMost: binary([0x65]),
  /** a sum of terms, 0 where there are none */
  sum: (terms: readonly Code[]): Code => (terms.length === 0 ? f64.constant(0) : terms.reduce((a, b) => add(a, b))),
  product: (...factors: readonly [Code, ...Code[]]): Code => factors.reduce((a, b) => mul(a, b)),
} as const;

export const i32 = {
  constant: (value: number): Code => [0x41, ...signed(value)],
  load: (address: Code, offset = 0): Code => [...address, 0x28, 2, ...unsigned(offset)],
  store: (address: Code, value: Code, offset = 0): Code => [...address, ...value, 0x36, 2, ...unsigned(offset)],
  add: binary([0x6a]),
  less: binary([0x48]),
  and: binary([0x71]),
  not: unary([0x45]),
} as const;

/** Two numbers at once. */
export const pair = {
  zero: [...simd(12), ...Array.from({ length: 16 }, () => 0)] as Code,
  load: (address: Code, offset = 0): Code => [...address, ...simd(0), 3, ...unsigned(offset)],
  /** one number, twice */
  loadTwice: (address: Code, offset = 0): Code => [...address, ...simd(10), 3, ...unsigned(offset)],
  store: (address: Code, value: Code, offset = 0): Code => [...address, ...value, ...simd(11), 3, ...unsigned(offset)],
  twice: unary(simd(20)),
  first: unary([...simd(33), 0]),
  second: unary([...simd(33), 1]),
  add: binary(simd(0xf0)),
  mul: binary(simd(0xf2)),
} as const;

export const flow = {
  sequence,
  /** `exit(n)` leaves the nth block around it */
  block: (body: Code): Code => [0x02, 0x40, ...body, 0x0b],
  /** `exit(n)` to a loop begins it anew */
  loop: (body: Code): Code => [0x03, 0x40, ...body, 0x0b],
  exit: (depth: number): Code => [0x0c, ...unsigned(depth)],
  exitIf: (condition: Code, depth: number): Code => [...condition, 0x0d, ...unsigned(depth)],
  when: (condition: Code, then: Code, otherwise: Code = []): Code => [
    ...condition,
    0x04,
    0x40,
    ...then,
    ...(otherwise.length > 0 ? [0x05, ...otherwise] : []),
    0x0b,
  ],
  call: (index: number, values: readonly Code[]): Code => [...sequence(values), 0x10, ...unsigned(index)],
} as const;

/** Parameters and locals of a function under names. */
export class Locals {
  private readonly types: ValueType[] = [];
  private readonly names = new Map<string, number>();
  private readonly parameters: number;

  constructor(parameters: readonly (readonly [string, ValueType])[]) {
    for (const [name, type] of parameters) this.declare(name, type);
    this.parameters = parameters.length;
  }

  get(name: string): Code {
    return [0x20, ...unsigned(this.indexOf(name))];
  }

  /** Declares the local where it is new. */
  set(name: string, value: Code, type: ValueType = 'f64'): Code {
    if (!this.names.has(name)) this.declare(name, type);
    return [...value, 0x21, ...unsigned(this.indexOf(name))];
  }

  parameterTypes(): number[] {
    return this.types.slice(0, this.parameters).map((type) => TYPES[type]);
  }

  declarations(): number[] {
    return vector(this.types.slice(this.parameters).map((type) => [1, TYPES[type]]));
  }

  private declare(name: string, type: ValueType): void {
    this.names.set(name, this.types.length);
    this.types.push(type);
  }

  private indexOf(name: string): number {
    const index = this.names.get(name);
    if (index === undefined) throw new Error(`no local ${name}`);
    return index;
  }
}

/**
 * A module with one function `run` without result, memory `memory.memory`, and imported functions of one number each, callable as 0, 1, …
 * @param imported names in the module `functions`
 */
export function wasmModule(imported: readonly string[], locals: Locals, body: Code): Uint8Array<ArrayBuffer> {
  const text = (name: string): number[] => withLength([...new TextEncoder().encode(name)]);
  const section = (id: number, content: Code): number[] => [id, ...withLength(content)];
  const parameterTypes = locals.parameterTypes();
  return Uint8Array.from(
    sequence([
      [0x00, 0x61, 0x73, 0x6d, 1, 0, 0, 0],
      section(
        1,
        vector([
          [0x60, 1, F64, 1, F64],
          [0x60, ...unsigned(parameterTypes.length), ...parameterTypes, 0],
        ]),
      ),
      section(
        2,
        vector([
          ...imported.map((name) => [...text('functions'), ...text(name), 0, 0]),
          [...text('memory'), ...text('memory'), 2, 0, 1],
        ]),
      ),
      section(3, vector([[1]])),
      section(7, vector([[...text('run'), 0, ...unsigned(imported.length)]])),
      section(10, vector([withLength([...locals.declarations(), ...body, 0x0b])])),
    ]),
  );
}
