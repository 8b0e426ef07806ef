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
  /** Slots: c_a, others, numbers, then the concentration `top` beyond which the tangent takes over. */
  readonly curve: Expr;
  readonly slots: number;
  readonly inverse: Special;
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
    if (f.kind === 'name' && f.name !== 'c_a' && !(f.name in law.constants) && !others.includes(f.name))
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
      if (f.name in law.constants) return number(f.name, law.constants[f.name]);
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
  const made: Shape = {
    others,
    numbers: [...numbers, { name: 'tangent from', unit: 'kg/m^3', value: 0 }],
    curve,
    slots,
    inverse: inverse(curve, slots),
    name: `formula ${count}`,
  };
  (made.numbers[made.numbers.length - 1] as { value: number }).value = tangentFrom(raw, made);
  known.set(law, made);
  return made;
}

/** Value and slope of an expression over slots, as plain functions of the first slot. */
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

/** The concentration at 0.999 of the ceiling, or "very much" where the formula has none. Other species as 1 g/L. */
function tangentFrom(raw: Expr, s: Shape): number {
  const f = evaluator(raw, s.slots);
  const rest = [...s.others.map(() => 1), ...s.numbers.map((q) => q.value)];
  const at = (c: number): number => f([c, ...rest]);
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
  const rest = (m: Member<FormulaLaw>, at: Local): Expr[] => [
    ...shape(m.law).others.map((name) => lookup(name, at)),
    ...m.q,
  ];
  return {
    numbers: (l) => shape(l).numbers,
    structure: (l) => shape(l).name,
    aqueous: (m, at) => call(shape(m.law).inverse, at.organic[m.solute], ...rest(m, at)),
    organic: (m, at) => substitute(shape(m.law).curve, [at.aqueous[m.solute], ...rest(m, at)]),
  };
};
