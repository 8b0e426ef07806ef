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

/** Bytes that are appended to. */
class Bytes {
  #data = new Uint8Array(256);
  #length = 0;

  get length(): number {
    return this.#length;
  }

  byte(v: number): void {
    if (this.#length === this.#data.length) this.#grow(1);
    this.#data[this.#length++] = v;
  }

  all(bytes: Uint8Array): void {
    if (this.#length + bytes.length > this.#data.length) this.#grow(bytes.length);
    this.#data.set(bytes, this.#length);
    this.#length += bytes.length;
  }

  /** LEB128 of a natural number, and of an integer. */
  unsigned(value: number): void {
    let v = value;
    while (v >= 0x80) {
      this.byte((v & 0x7f) | 0x80);
      v >>>= 7;
    }
    this.byte(v);
  }

  signed(value: number): void {
    let v = value;
    for (;;) {
      const low = v & 0x7f;
      v >>= 7;
      if ((v === 0 && (low & 0x40) === 0) || (v === -1 && (low & 0x40) !== 0)) {
        this.byte(low);
        return;
      }
      this.byte(low | 0x80);
    }
  }

  text(s: string): void {
    const bytes = new TextEncoder().encode(s);
    this.unsigned(bytes.length);
    this.all(bytes);
  }

  /** Another piece with its length before it. */
  sized(piece: Bytes): void {
    this.unsigned(piece.length);
    this.all(piece.done());
  }

  done(): Uint8Array<ArrayBuffer> {
    return this.#data.subarray(0, this.#length);
  }

  #grow(by: number): void {
    const larger = new Uint8Array(Math.max(2 * this.#data.length, this.#length + by));
    larger.set(this.#data);
    this.#data = larger;
  }
}

const number = new Float64Array(1);
const ofNumber = new Uint8Array(number.buffer);

/** The body of one function: instructions in stack order. Locals: BASE, integers, then numbers, then pairs of numbers. */
export class Code {
  readonly #bytes = new Bytes();
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
    this.#bytes.byte(0x41);
    this.#bytes.signed(v);
    return this;
  }

  addIntegers(): this {
    this.#bytes.byte(0x6a);
    return this;
  }

  constant(v: number): this {
    this.#bytes.byte(0x44);
    number[0] = v;
    this.#bytes.all(ofNumber);
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
    this.#bytes.byte(scalar[op]);
    return this;
  }

  negate(): this {
    this.#bytes.byte(0x9a);
    return this;
  }

  absolute(): this {
    this.#bytes.byte(0x99);
    return this;
  }

  root(): this {
    this.#bytes.byte(0x9f);
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

  /** The function in the binary format, with its declarations of locals, in front of which its length stands. */
  encode(to: Bytes): void {
    const groups = [
      [this.integers, I32],
      [this.pairs, 0x7b],
      [this.#numbers, F64],
    ].filter(([count]) => count > 0);
    const head = new Bytes();
    head.unsigned(groups.length);
    for (const [count, type] of groups) {
      head.unsigned(count);
      head.byte(type);
    }
    to.unsigned(head.length + this.#bytes.length + 1);
    to.all(head.done());
    to.all(this.#bytes.done());
    to.byte(0x0b);
  }

  #op(code: number, ...operands: number[]): this {
    this.#bytes.byte(code);
    return this.#operands(...operands);
  }

  #operands(...operands: number[]): this {
    for (const v of operands) this.#bytes.unsigned(v);
    return this;
  }

  #wide(code: number): this {
    return this.#op(0xfd, code);
  }

  #raw(...bytes: number[]): this {
    for (const v of bytes) this.#bytes.byte(v);
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
  const bytes = new Bytes();
  bytes.all(Uint8Array.of(0x00, 0x61, 0x73, 0x6d, 0x01, 0x00, 0x00, 0x00));
  const section = (id: number, count: number, write: (to: Bytes) => void): void => {
    const body = new Bytes();
    body.unsigned(count);
    write(body);
    bytes.byte(id);
    bytes.sized(body);
  };
  section(1, types.length, (to) => {
    for (const t of types) {
      to.byte(0x60);
      for (const v of t.split(',')) to.byte(Number(v));
    }
  });
  section(2, 1 + imports.length, (to) => {
    to.text('m');
    to.text('memory');
    to.all(Uint8Array.of(0x02, 0x00, 0x01));
    imports.forEach((f, i) => {
      to.text('f');
      to.text(f.name);
      to.byte(0x00);
      to.unsigned(importTypes[i]);
    });
  });
  section(3, functions.length, (to) => {
    for (const t of functionTypes) to.unsigned(t);
  });
  section(7, exports.size, (to) => {
    for (const [name, index] of exports) {
      to.text(name);
      to.byte(0x00);
      to.unsigned(index);
    }
  });
  section(10, functions.length, (to) => {
    for (const code of functions) code.encode(to);
  });
  return bytes.done();
}
