import { differentiate } from '../../math/differentiate.ts';
import * as x from '../../math/expression.ts';
import {
  add,
  call,
  constant,
  div,
  type Expr,
  input,
  mul,
  type Special,
  select,
  sub,
} from '../../math/expression.ts';
import { generated } from '../../math/kernel.ts';
import { risingRoot } from '../../math/roots.ts';
import { substitute } from '../../math/substitute.ts';
import type { Formula, Law } from '../../scenario/scenario.ts';
import type { LawKind, LawNumber, Local, Member } from './law.ts';

type FormulaLaw = Extract<Law, { law: 'formula' }>;

/** Where a formula saturates, it counts as overloaded beyond this share of its ceiling. */
const LOADED = 0.999;
/** kg/m³ taken as "very much" when looking for a ceiling. */
const VERY_MUCH = 1e9;

const operators: Record<string, (...args: Expr[]) => Expr> = {
  '+': x.add,
  '-': (a, b) => (b === undefined ? x.neg(a) : x.sub(a, b)),
  '*': x.mul,
  '/': x.div,
  '^': x.pow,
  exp: x.exp,
  log: x.log,
  ln: x.log,
  log10: (a) => div(x.log(a), Math.LN10),
  sqrt: x.sqrt,
  abs: x.abs,
  min: (...args) => args.reduce(x.min),
  max: (...args) => args.reduce(x.max),
  tanh: x.tanh,
};

/** Names that a formula may use for elementary functions; the scenario refuses all others. */
export const formulaOperators: readonly string[] = Object.keys(operators);

interface Shape {
  /** Names other than c_a and constants, in the order of the slots 1 … */
  readonly others: readonly string[];
  readonly numbers: readonly LawNumber[];
  /** As the user wrote it. */
  readonly raw: Expr;
  /** Slots: c_a, others, numbers, then the concentration `top` beyond which the tangent takes over. */
  readonly curve: Expr;
  readonly slots: number;
  readonly inverse: Special;
  /** `top` from the others and the numbers; null where there are no others: then it is the last number. */
  readonly overload: Special | null;
  readonly name: string;
}

const known = new WeakMap<FormulaLaw, Shape>();
let count = 0;

/** Formula → expression over slots. Numbers of the user become arguments, never text of a program. */
function shape(law: FormulaLaw): Shape {
  const found = known.get(law);
  if (found) return found;
  const others: string[] = [];
  const numbers: LawNumber[] = [];
  const collect = (f: Formula): void => {
    if (
      f.kind === 'name' &&
      f.name !== 'c_a' &&
      !Object.hasOwn(law.constants, f.name) &&
      !others.includes(f.name)
    )
      others.push(f.name);
    if (f.kind === 'apply') f.args.forEach(collect);
  };
  collect(law.organic);
  const first = 1 + others.length;
  const number = (name: string, value: number): Expr => {
    const at = numbers.findIndex((q) => q.name === name);
    if (at >= 0) return input(first + at);
    numbers.push({ name, unit: '', value });
    return input(first + numbers.length - 1);
  };
  const build = (f: Formula): Expr => {
    if (f.kind === 'number') return number(`number ${f.value}`, f.value);
    if (f.kind === 'name') {
      if (f.name === 'c_a') return input(0);
      if (Object.hasOwn(law.constants, f.name)) return number(f.name, law.constants[f.name]);
      return input(1 + others.indexOf(f.name));
    }
    const [a, b] = f.args;
    const whole = b?.kind === 'number' && Number.isInteger(b.value) && Math.abs(b.value) <= 3;
    if (f.op === '^' && whole) return x.pow(build(a), constant(b.value));
    return operators[f.op](...f.args.map(build));
  };
  const raw = build(law.organic);
  const slots = first + numbers.length + 1;
  const top = input(slots - 1);
  const identity = Array.from({ length: slots }, (_, i) => input(i));
  const atPoint = (e: Expr, c: Expr): Expr => substitute(e, [c, ...identity.slice(1)]);
  const slope = differentiate(raw, 0);
  const c = input(0);
  const beyond = add(atPoint(raw, top), mul(atPoint(slope, top), sub(c, top)));
  const below = mul(atPoint(slope, constant(0)), c);
  const curve = select(c, select(sub(top, c), raw, beyond), below);
  count += 1;
  const overload = others.length > 0 ? overloadOf(raw, slope, slots - 1) : null;
  if (!overload) {
    const f = evaluator(raw, slots);
    const values = numbers.map((q) => q.value);
    numbers.push({ name: 'tangent from', unit: 'kg/m^3', value: tangentFrom((c) => f([c, ...values, 0])) });
  }
  const name = `formula ${count}`;
  const made = { others, numbers, raw, curve, slots, inverse: inverse(curve, slots), overload, name };
  known.set(law, made);
  return made;
}

/** An expression over slots as a plain function of their values. */
function evaluator(e: Expr, slots: number): (args: readonly number[]) => number {
  const run = generated.run(
    { name: 'formula', args: Array.from({ length: slots }, (_, i) => `s${i}`), outputs: [e] },
    'assign',
  );
  const references = Int32Array.from({ length: slots + 1 }, (_, i) => (i < slots ? i : 0));
  const board = new Float64Array(slots);
  const y = new Float64Array(1);
  return (args) => {
    for (let i = 0; i < slots; i++) board[i] = args[i];
    run(1, references, board, y);
    return y[0];
  };
}

/** The concentration at 0.999 of the ceiling, or "very much" where the formula has none. */
function tangentFrom(at: (c: number) => number): number {
  const ceiling = at(VERY_MUCH);
  if (!Number.isFinite(ceiling) || ceiling > 2 * at(VERY_MUCH / 1e3)) return VERY_MUCH;
  let lo = 0;
  let hi = VERY_MUCH;
  for (let k = 0; k < 200 && hi - lo > 1e-12 * hi; k++) {
    const mid = (lo + hi) / 2;
    if (at(mid) < LOADED * ceiling) lo = mid;
    else hi = mid;
  }
  return hi;
}

/**
 * The same for the other species as they are, which may move the ceiling or how soon it is met. From
 * f(top, s) = 0.999·f(∞, s): ∂top/∂s = (0.999·∂f/∂s(∞) − ∂f/∂s(top))/f′(top).
 */
function overloadOf(raw: Expr, slope: Expr, count: number): Special {
  const f = evaluator(raw, count + 1);
  const partial = Array.from({ length: count }, (_, i) => differentiate(raw, i + 1));
  return {
    name: 'overload of a formula',
    evaluate: (...rest) => tangentFrom((c) => f([c, ...rest])),
    partials(rest, self) {
      const at = (e: Expr, c: Expr): Expr => substitute(e, [c, ...rest]);
      const far = constant(VERY_MUCH);
      const moves = (d: Expr): Expr => div(sub(mul(LOADED, at(d, far)), at(d, self)), at(slope, self));
      // Without a ceiling the point stays where it is, and the quotient may be no number.
      return partial.map((d) => select(sub(self, far), 0, moves(d)));
    },
  };
}

/** A formula as the user wrote it, without what we add beyond its ends: c_o and its slope over c_a. */
export function asWritten(law: FormulaLaw): {
  readonly others: readonly string[];
  readonly value: (ca: number, others: readonly number[]) => number;
  readonly slope: (ca: number, others: readonly number[]) => number;
} {
  const { raw, others, numbers, slots } = shape(law);
  const values = numbers.map((q) => q.value);
  const plain = (e: Expr): ((ca: number, at: readonly number[]) => number) => {
    const f = evaluator(e, slots);
    return (ca, at) => f([ca, ...at, ...values]);
  };
  return { others, value: plain(raw), slope: plain(differentiate(raw, 0)) };
}

/** c_a from c_o: the root of the rising curve; its partials by the implicit function theorem. */
function inverse(curve: Expr, slots: number): Special {
  const value = evaluator(curve, slots);
  const slope = evaluator(differentiate(curve, 0), slots);
  const partial = Array.from({ length: slots }, (_, i) => differentiate(curve, i));
  return {
    name: 'inverse of a formula',
    evaluate(co, ...rest) {
      const f = (c: number): number => value([c, ...rest]) - co;
      const d = (c: number): number => slope([c, ...rest]);
      if (!Number.isFinite(co)) return Number.NaN;
      const atZero = d(0);
      if (co <= 0) return co / atZero;
      let hi = Math.max(co / atZero, 1e-12);
      for (let k = 0; k < 2000 && f(hi) < 0; k++) hi *= 2;
      return f(hi) >= 0 ? risingRoot(f, d, 0, hi, co / atZero).value : Number.NaN;
    },
    partials([, ...rest], self) {
      const at = (e: Expr): Expr => substitute(e, [self, ...rest]);
      const bySelf = at(partial[0]);
      return [div(1, bySelf), ...rest.map((_, i) => div(mul(-1, at(partial[i + 1])), bySelf))];
    },
  };
}

/** Finds the concentrations that a formula's names stand for. */
export type NameLookup = (name: string, at: Local) => Expr;

/** The user's own expression of c_a, of other dissolved species and of constants: c_o = f(c_a, …), in g/L. */
export const formulaLaw = (lookup: NameLookup): LawKind<FormulaLaw> => {
  const rest = (m: Member<FormulaLaw>, at: Local): Expr[] => {
    const { others, overload } = shape(m.law);
    const known = [...others.map((name) => lookup(name, at)), ...m.q];
    return overload ? [...known, call(overload, ...known)] : known;
  };
  return {
    numbers: (l) => shape(l).numbers,
    structure: (l) => shape(l).name,
    aqueous: (m, at) => call(shape(m.law).inverse, at.organic[m.solute], ...rest(m, at)),
    organic: (m, at) => substitute(shape(m.law).curve, [at.aqueous[m.solute], ...rest(m, at)]),
  };
};
