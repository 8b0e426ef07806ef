/**
 * The binary format of WebAssembly as far as generated loops need it: functions over one imported memory and imported
 * functions of numbers. W3C, WebAssembly Core Specification 2.0 (2022), chapter 5.
 */

const I32 = 0x7f;
const F64 = 0x7c;

/** Local 0 of each function: the address in bytes from which all offsets count. */
export const BASE = 0;

export type Binary = 'add' | 'sub' | 'mul' | 'div' | 'min' | 'max';
const scalar: Record<Binary, number> = { add: 0xa0, sub: 0xa1, mul: 0xa2, div: 0xa3, min: 0xa4, max: 0xa5 };
const vector: Record<Binary, number> = { add: 240, sub: 241, mul: 242, div: 243, min: 244, max: 245 };

/** The body of one function: instructions in stack order. Locals: BASE, integers, then numbers, then pairs of numbers. */
export class Code {
  readonly #bytes: number[] = [];
  readonly integers: number;
  #numbers = 0;
  readonly pairs: number;
  /** Addresses that the function is given, BASE included. */
  readonly given: number;

  /** `integers`: addresses besides the given ones; `pairs`: locals that hold two numbers. */
  constructor(integers: number, pairs = 0, given = 1) {
    this.integers = integers;
    this.pairs = pairs;
    this.given = given;
  }

  get length(): number {
    return this.#bytes.length;
  }

  /** Numbers that are in use at once, at most. */
  needs(numbers: number): void {
    this.#numbers = Math.max(this.#numbers, numbers);
  }

  /** The local of a number beyond the first `used` of them. */
  spare(used: number): number {
    this.needs(used + 1);
    return this.number(used);
  }

  get numbers(): number {
    return this.#numbers;
  }

  /** The k-th integer, or number; pairs come before numbers so that these may grow. */
  integer = (k: number): number => this.given + k;
  pair = (k: number): number => this.given + this.integers + k;
  number = (k: number): number => this.given + this.integers + this.pairs + k;

  get(local: number): this {
    return this.#op(0x20, local);
  }

  set(local: number): this {
    return this.#op(0x21, local);
  }

  tee(local: number): this {
    return this.#op(0x22, local);
  }

  integerConstant(v: number): this {
    this.#bytes.push(0x41);
    signed(this.#bytes, v);
    return this;
  }

  addIntegers(): this {
    this.#bytes.push(0x6a);
    return this;
  }

  constant(v: number): this {
    this.#bytes.push(0x44, ...new Uint8Array(new Float64Array([v]).buffer));
    return this;
  }

  /** The number at the address on the stack, plus an offset in bytes. */
  load(offset: number): this {
    return this.#op(0x2b, 3, offset);
  }

  /** Stack: address, number. */
  store(offset: number): this {
    return this.#op(0x39, 3, offset);
  }

  binary(op: Binary): this {
    this.#bytes.push(scalar[op]);
    return this;
  }

  negate(): this {
    this.#bytes.push(0x9a);
    return this;
  }

  absolute(): this {
    this.#bytes.push(0x99);
    return this;
  }

  root(): this {
    this.#bytes.push(0x9f);
    return this;
  }

  /** Stack: a, b, c → c ≥ 0 ? a : b. */
  select(): this {
    return this.constant(0).#raw(0x66, 0x1b);
  }

  call(index: number): this {
    return this.#op(0x10, index);
  }

  /** Repeats what `body` writes as long as `local`, moved by `by` each time, has not come to `end` beyond BASE. */
  repeat(local: number, by: number, end: number, body: () => void): void {
    this.#raw(0x03, 0x40);
    body();
    this.get(local).integerConstant(by).addIntegers().tee(local);
    this.get(BASE).integerConstant(end).addIntegers();
    // i32.ne, br_if 0, end
    this.#raw(0x47, 0x0d, 0x00, 0x0b);
  }

  loadPair(offset: number): this {
    return this.#wide(0).#operands(3, offset);
  }

  storePair(offset: number): this {
    return this.#wide(11).#operands(3, offset);
  }

  binaryPair(op: Binary): this {
    return this.#wide(vector[op]);
  }

  absolutePair(): this {
    return this.#wide(236);
  }

  /** The number on the stack twice. */
  splat(): this {
    return this.#wide(20);
  }

  /** One of the two numbers of the pair on the stack. */
  lane(k: 0 | 1): this {
    return this.#wide(33).#raw(k);
  }

  /** Stack: address, value of the byte, length in bytes. */
  fill(): this {
    return this.#raw(0xfc, 11, 0);
  }

  /** Stack: to, from, length in bytes. */
  copy(): this {
    return this.#raw(0xfc, 10, 0, 0);
  }

  /** The function in the binary format, with its declarations of locals. */
  encoded(): number[] {
    const body: number[] = [];
    const groups = [
      [this.integers, I32],
      [this.pairs, 0x7b],
      [this.#numbers, F64],
    ].filter(([count]) => count > 0);
    unsigned(body, groups.length);
    for (const [count, type] of groups) {
      unsigned(body, count);
      body.push(type);
    }
    append(body, this.#bytes);
    body.push(0x0b);
    const sized: number[] = [];
    unsigned(sized, body.length);
    append(sized, body);
    return sized;
  }

  #op(code: number, ...operands: number[]): this {
    this.#bytes.push(code);
    return this.#operands(...operands);
  }

  #operands(...operands: number[]): this {
    for (const v of operands) unsigned(this.#bytes, v);
    return this;
  }

  #wide(code: number): this {
    return this.#op(0xfd, code);
  }

  #raw(...bytes: number[]): this {
    this.#bytes.push(...bytes);
    return this;
  }
}

/** An imported function: of numbers, with a number as its result, or of one address and no result. */
export interface Imported {
  readonly name: string;
  readonly arity: number | 'address';
}

/**
 * A module over an imported memory `m.memory` of `pages` or more. `imports` come first in the numbering of functions;
 * `exports` name functions by their number.
 */
export function encodeModule(
  imports: readonly Imported[],
  functions: readonly Code[],
  exports: ReadonlyMap<string, number>,
): Uint8Array<ArrayBuffer> {
  const types: string[] = [];
  const typeOf = (parameters: readonly number[], results: readonly number[]): number => {
    const key = [parameters.length, ...parameters, results.length, ...results].join(',');
    const at = types.indexOf(key);
    return at >= 0 ? at : types.push(key) - 1;
  };
  const importTypes = imports.map((f) =>
    f.arity === 'address' ? typeOf([I32], []) : typeOf(new Array(f.arity).fill(F64), [F64]),
  );
  const functionTypes = functions.map((code) => typeOf(new Array(code.given).fill(I32), []));
  const bytes = [0x00, 0x61, 0x73, 0x6d, 0x01, 0x00, 0x00, 0x00];
  section(
    bytes,
    1,
    types.map((t) => {
      const numbers = t.split(',').map(Number);
      return [0x60, ...numbers];
    }),
  );
  section(bytes, 2, [
    [...text('m'), ...text('memory'), 0x02, 0x00, 0x01],
    ...imports.map((f, i) => [...text('f'), ...text(f.name), 0x00, ...leb(importTypes[i])]),
  ]);
  section(
    bytes,
    3,
    functionTypes.map((t) => leb(t)),
  );
  section(
    bytes,
    7,
    [...exports].map(([name, index]) => [...text(name), 0x00, ...leb(index)]),
  );
  section(
    bytes,
    10,
    functions.map((code) => code.encoded()),
  );
  return Uint8Array.from(bytes);
}

function section(bytes: number[], id: number, items: readonly (readonly number[])[]): void {
  const body: number[] = [];
  unsigned(body, items.length);
  for (const q of items) append(body, q);
  bytes.push(id);
  unsigned(bytes, body.length);
  append(bytes, body);
}

/** A spread of many arguments would overflow the stack. */
function append(to: number[], from: readonly number[]): void {
  for (let i = 0; i < from.length; i++) to.push(from[i]);
}

const text = (s: string): number[] => [...leb(s.length), ...new TextEncoder().encode(s)];

const leb = (v: number): number[] => {
  const bytes: number[] = [];
  unsigned(bytes, v);
  return bytes;
};

function unsigned(bytes: number[], value: number): void {
  let v = value;
  do {
    const low = v & 0x7f;
    v >>>= 7;
    bytes.push(v === 0 ? low : low | 0x80);
  } while (v !== 0);
}

function signed(bytes: number[], value: number): void {
  let v = value;
  for (;;) {
    const low = v & 0x7f;
    v >>= 7;
    if ((v === 0 && (low & 0x40) === 0) || (v === -1 && (low & 0x40) !== 0)) {
      bytes.push(low);
      return;
    }
    bytes.push(low | 0x80);
  }
}
