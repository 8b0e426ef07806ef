import { differentiate } from './differentiate.ts';
import { type Expr, input, type Special, slotsOf, topological } from './expression.ts';

/**
 * A kernel: a few expressions over named arguments, evaluated for many places of the plant at once.
 *
 * `references` is an instance-major list: for each instance the addresses of its arguments on the board of
 * values, then the addresses of its targets (`targetsPer` for each output).
 */
export interface Kernel {
  readonly name: string;
  readonly args: readonly string[];
  readonly outputs: readonly Expr[];
}

/** What an output does with its value: stored at one address, or taken from one and added to another. */
export type Effect = 'assign' | 'move';
export const targetsPer = { assign: 1, move: 2 } as const;

export type Run = (
  instances: number,
  references: Int32Array,
  board: Float64Array,
  target: Float64Array,
) => void;
/** Writes `pairs.length` partial derivatives an instance, instance-major. */
export type Derive = Run;

export interface Pair {
  readonly output: number;
  readonly arg: number;
}

export function kernel(
  name: string,
  args: readonly string[],
  build: (...args: Expr[]) => Expr | readonly Expr[],
): Kernel {
  const outputs = build(...args.map((_, i) => input(i)));
  return { name, args, outputs: Array.isArray(outputs) ? outputs : [outputs as Expr] };
}

/** The pairs (output, argument) that can be non-zero, for the arguments that `active` names. */
export function dependencies(k: Kernel, active: (arg: number) => boolean): Pair[] {
  return k.outputs.flatMap((e, output) =>
    [...slotsOf(e)]
      .sort((a, b) => a - b)
      .filter(active)
      .map((arg) => ({ output, arg })),
  );
}

const partials = new WeakMap<Kernel, Map<string, readonly Expr[]>>();

/** Derivatives of a kernel, worked out once a process. */
export function partialsOf(k: Kernel, pairs: readonly Pair[]): readonly Expr[] {
  const own = partials.get(k) ?? new Map<string, readonly Expr[]>();
  partials.set(k, own);
  const key = pairs.map((p) => `${p.output}/${p.arg}`).join();
  const made = own.get(key) ?? pairs.map((p) => differentiate(k.outputs[p.output], p.arg));
  own.set(key, made);
  return made;
}

/** How a kernel is carried out: as generated code (fast), or node by node (the oracle, and the fallback). */
export interface Execution {
  readonly name: string;
  run(k: Kernel, effect: Effect): Run;
  derive(k: Kernel, pairs: readonly Pair[]): Derive;
}

export const generated: Execution = {
  name: 'generated',
  run: (k, effect) => generate(k.args.length, k.outputs, effect),
  derive: (k, pairs) => generate(k.args.length, partialsOf(k, pairs), 'list'),
};

export const interpreted: Execution = {
  name: 'interpreted',
  run: (k, effect) => interpret(k.args.length, k.outputs, effect),
  derive: (k, pairs) => interpret(k.args.length, partialsOf(k, pairs), 'list'),
};

type Sink = Effect | 'list';

/**
 * One loop over the instances with the formula spelled out in its body. The text holds nothing but operators,
 * local names and numbers that the program itself wrote: names and formulas of a user never get here.
 * A derivative does not know how many targets its kernel has, so the stride travels with the call.
 */
function generate(argCount: number, roots: readonly Expr[], sink: Sink): Run {
  const specials: Special[] = [];
  const name = new Map<Expr, string>();
  const lines: string[] = [];
  for (const e of topological(roots)) {
    const text = spell(e, (a) => name.get(a) as string, specials);
    if (e.kind === 'constant') name.set(e, text);
    else {
      name.set(e, `t${name.size}`);
      lines.push(`const ${name.get(e)} = ${text};`);
    }
  }
  const n = roots.length;
  roots.forEach((e, i) => {
    const value = name.get(e);
    const ref = `r[k + ${argCount + i}]`;
    if (sink === 'assign') lines.push(`y[${ref}] = ${value};`);
    else if (sink === 'list') lines.push(`y[o + ${i}] = ${value};`);
    else {
      const from = `r[k + ${argCount + 2 * i}]`;
      const to = `r[k + ${argCount + 2 * i + 1}]`;
      lines.push(`const m${i} = ${value}; y[${from}] -= m${i}; y[${to}] += m${i};`);
    }
  });
  const body = `"use strict";
return function (count, r, v, y) {
  const stride = count > 0 ? r.length / count : 0;
  for (let i = 0, k = 0, o = 0; i < count; i++, k += stride, o += ${n}) {
    ${lines.join('\n    ')}
  }
};`;
  return new Function('F', body)(specials) as Run;
}

function spell(e: Expr, at: (a: Expr) => string, specials: Special[]): string {
  if (e.kind === 'constant') return number(e.value);
  if (e.kind === 'input') return `v[r[k + ${e.slot}]]`;
  const args = e.args.map(at);
  if (e.kind === 'special') {
    let i = specials.indexOf(e.special);
    if (i < 0) i = specials.push(e.special) - 1;
    return `F[${i}].evaluate(${args.join(', ')})`;
  }
  const [a, b, c] = args;
  switch (e.op) {
    case 'add':
      return `${a} + ${b}`;
    case 'sub':
      return `${a} - ${b}`;
    case 'mul':
      return `${a} * ${b}`;
    case 'div':
      return `${a} / ${b}`;
    case 'neg':
      return `-(${a})`;
    case 'select':
      return `${a} >= 0 ? ${b} : ${c}`;
    default:
      return `Math.${e.op}(${args.join(', ')})`;
  }
}

const number = (x: number): string => (x < 0 ? `(${x})` : String(x));

/** The same result without generated code: each node in turn, for each instance. */
function interpret(argCount: number, roots: readonly Expr[], sink: Sink): Run {
  const order = topological(roots);
  const index = new Map(order.map((e, i) => [e, i]));
  const at = roots.map((e) => index.get(e) as number);
  const value = new Float64Array(order.length);
  const evaluate = order.map((e) => step(e, (a) => index.get(a) as number, value));
  return (count, r, v, y) => {
    const stride = count > 0 ? r.length / count : 0;
    for (let i = 0, k = 0; i < count; i++, k += stride) {
      evaluate.forEach((f, j) => {
        value[j] = f(r, k, v);
      });
      at.forEach((j, q) => {
        if (sink === 'assign') y[r[k + argCount + q]] = value[j];
        else if (sink === 'list') y[i * at.length + q] = value[j];
        else {
          y[r[k + argCount + 2 * q]] -= value[j];
          y[r[k + argCount + 2 * q + 1]] += value[j];
        }
      });
    }
  };
}

type Step = (r: Int32Array, k: number, v: Float64Array) => number;

function step(e: Expr, at: (a: Expr) => number, t: Float64Array): Step {
  if (e.kind === 'constant') return () => e.value;
  if (e.kind === 'input') return (r, k, v) => v[r[k + e.slot]];
  const [a, b, c] = e.args.map(at);
  if (e.kind === 'special') {
    const args = e.args.map(at);
    return () => e.special.evaluate(...args.map((i) => t[i]));
  }
  switch (e.op) {
    case 'add':
      return () => t[a] + t[b];
    case 'sub':
      return () => t[a] - t[b];
    case 'mul':
      return () => t[a] * t[b];
    case 'div':
      return () => t[a] / t[b];
    case 'neg':
      return () => -t[a];
    case 'pow':
      return () => t[a] ** t[b];
    case 'select':
      return () => (t[a] >= 0 ? t[b] : t[c]);
    default: {
      const f = Math[e.op];
      return () => f(t[a]);
    }
  }
}
