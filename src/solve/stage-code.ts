import { BASE, Code } from '../math/machine/module.ts';
import type { Tableau } from './tableau.ts';

/** Where the vectors of a step begin, in numbers from the start of the region; all are of even length. */
export interface StepPlaces {
  readonly length: number;
  readonly x: number;
  readonly x1: number;
  readonly trial: number;
  readonly dx: number;
  /** Right-hand side of a stage, then its solution. */
  readonly stage: number;
  /** Absolute tolerances, infinite for what is not judged; floors, −∞ where there are none. */
  readonly absolute: number;
  readonly floor: number;
  /** Solutions of all stages; terms of dense output. */
  readonly u: number;
  readonly k: number;
  /** 1/h, relative tolerance; largest scaled error, and by how much the lowest place lies below its floor. */
  readonly perStep: number;
  readonly relative: number;
  readonly error: number;
  readonly below: number;
  /** A point of dense output, and where in the step it lies. */
  readonly point: number;
  readonly share: number;
}

const PAIR = 16;

/** One pass over all vectors, two places at a time. Pair locals: `held` of them, then one to work with. */
function pass(
  held: number,
  places: StepPlaces,
  start: (c: Code) => void,
  body: (c: Code, at: number) => void,
) {
  const code = new Code(1, held + 1);
  const pointer = code.integer(0);
  start(code);
  code.get(BASE).set(pointer);
  code.repeat(pointer, PAIR, 8 * places.length, () => {
    body(code, pointer);
  });
  return code;
}

/** Σ weights·u + what `first` leaves on the stack; the weights in pair locals 0, 1 … */
function sum(code: Code, pointer: number, terms: readonly number[], places: StepPlaces): void {
  terms.forEach((j, i) => {
    code
      .get(code.pair(i))
      .get(pointer)
      .loadPair(8 * (places.u + j * places.length))
      .binaryPair('mul')
      .binaryPair('add');
  });
}

const terms = (weights: readonly number[]): number[] => weights.flatMap((v, j) => (v === 0 ? [] : [j]));

function weigh(code: Code, weights: readonly number[]): void {
  terms(weights).forEach((j, i) => {
    code.constant(weights[j]).splat().set(code.pair(i));
  });
}

/** trial = x + Σ aⱼuⱼ of a stage. */
export function stateCode(t: Tableau, stage: number, p: StepPlaces): Code {
  const own = terms(t.a[stage]);
  return pass(
    own.length,
    p,
    (code) => weigh(code, t.a[stage]),
    (code, pointer) => {
      code
        .get(pointer)
        .get(pointer)
        .loadPair(8 * p.x);
      sum(code, pointer, own, p);
      code.storePair(8 * p.trial);
    },
  );
}

/** Right-hand side of a stage: dx + (1/h)·Σ cⱼuⱼ. */
export function slopeCode(t: Tableau, stage: number, p: StepPlaces): Code {
  const own = terms(t.c[stage]);
  const perStep = own.length;
  return pass(
    own.length + 1,
    p,
    (code) => {
      weigh(code, t.c[stage]);
      code
        .get(BASE)
        .load(8 * p.perStep)
        .splat()
        .set(code.pair(perStep));
    },
    (code, pointer) => {
      code.get(pointer);
      code.get(pointer).loadPair(8 * p.dx);
      code.get(code.pair(perStep)).constant(0).splat();
      sum(code, pointer, own, p);
      code
        .binaryPair('mul')
        .binaryPair('add')
        .storePair(8 * p.stage);
    },
  );
}

/** uᵢ = the solution of the stage. */
export const keepCode = (stage: number, p: StepPlaces): Code =>
  new Code(0)
    .get(BASE)
    .integerConstant(8 * (p.u + stage * p.length))
    .addIntegers()
    .get(BASE)
    .integerConstant(8 * p.stage)
    .addIntegers()
    .integerConstant(8 * p.length)
    .copy();

/** x₁ = trial + the last solution, its scaled error, and the lowest place. */
export function finishCode(p: StepPlaces): Code {
  const [relative, worst, below, value] = [0, 1, 2, 3];
  const code = pass(
    4,
    p,
    (c) => {
      c.get(BASE)
        .load(8 * p.relative)
        .splat()
        .set(c.pair(relative));
      c.constant(0).splat().set(c.pair(worst));
      c.constant(-Infinity).splat().set(c.pair(below));
    },
    (c, pointer) => {
      const vector = (from: number): Code => c.get(pointer).loadPair(8 * from);
      c.get(pointer);
      vector(p.trial);
      vector(p.stage)
        .binaryPair('add')
        .tee(c.pair(value))
        .storePair(8 * p.x1);
      vector(p.floor)
        .get(c.pair(value))
        .binaryPair('sub')
        .get(c.pair(below))
        .binaryPair('max')
        .set(c.pair(below));
      vector(p.stage).absolutePair();
      vector(p.absolute).get(c.pair(relative));
      vector(p.x).absolutePair().get(c.pair(value)).absolutePair().binaryPair('max');
      c.binaryPair('mul').binaryPair('add').binaryPair('div');
      c.get(c.pair(worst)).binaryPair('max').set(c.pair(worst));
    },
  );
  for (const [pair, to] of [
    [worst, p.error],
    [below, p.below],
  ]) {
    code.get(BASE);
    code
      .get(code.pair(pair))
      .lane(0)
      .get(code.pair(pair))
      .lane(1)
      .binary('max')
      .store(8 * to);
  }
  return code;
}

/** Where the dx/dt of a System stands, and how many functions work it out; numbers of functions in the module. */
export interface FusedCalls {
  readonly rhs: readonly number[];
  readonly state: (stage: number) => number;
  readonly slope: (stage: number) => number;
  readonly keep: (stage: number) => number;
  readonly solve: readonly number[];
  readonly finish: number;
  /** Bytes beyond the base of the System. */
  readonly x: number;
  readonly change: number;
}

/**
 * All stages but the first, and the end of the step, in one go; inputs do not move, and the factors are to be trusted.
 * The second address given is the base of the System.
 */
export function restCode(t: Tableau, n: number, p: StepPlaces, calls: FusedCalls): Code {
  const code = new Code(0, 0, 2);
  const system = 1;
  const copied = (to: readonly [base: number, offset: number], from: readonly [number, number]): void => {
    for (const [base, offset] of [to, from]) code.get(base).integerConstant(offset).addIntegers();
    code.integerConstant(8 * n).copy();
  };
  for (let i = 1; i < t.alpha.length; i++) {
    code.get(BASE).call(calls.state(i));
    copied([system, calls.x], [BASE, 8 * p.trial]);
    for (const f of calls.rhs) code.get(system).call(f);
    copied([BASE, 8 * p.dx], [system, calls.change]);
    code.get(BASE).call(calls.slope(i));
    for (const f of calls.solve) code.get(BASE).call(f);
    code.get(BASE).call(calls.keep(i));
  }
  return code.get(BASE).call(calls.finish);
}

/** A point of dense output: x₀(1 − s) + s(x₁ + (1 − s)(k₁ + s(k₂ + …))), s in `share`. */
export function pointCode(t: Tableau, p: StepPlaces): Code {
  const [s, r] = [0, 1];
  return pass(
    2,
    p,
    (c) => {
      c.get(BASE)
        .load(8 * p.share)
        .splat()
        .set(c.pair(s));
      c.constant(1).splat().get(c.pair(s)).binaryPair('sub').set(c.pair(r));
    },
    (c, pointer) => {
      const vector = (from: number): Code => c.get(pointer).loadPair(8 * from);
      c.get(pointer);
      vector(p.x).get(c.pair(r)).binaryPair('mul').get(c.pair(s));
      vector(p.x1).get(c.pair(r));
      t.dense.forEach((_, m) => {
        vector(p.k + m * p.length);
        if (m + 1 < t.dense.length) c.get(c.pair(s));
      });
      for (let m = 1; m < t.dense.length; m++) c.binaryPair('mul').binaryPair('add');
      c.binaryPair('mul')
        .binaryPair('add')
        .binaryPair('mul')
        .binaryPair('add')
        .storePair(8 * p.point);
    },
  );
}

/** Terms of dense output: kₘ = Σⱼ dense[m][j]·uⱼ. */
export function denseCode(t: Tableau, m: number, p: StepPlaces): Code {
  const own = terms(t.dense[m]);
  return pass(
    own.length,
    p,
    (code) => weigh(code, t.dense[m]),
    (code, pointer) => {
      code.get(pointer).constant(0).splat();
      sum(code, pointer, own, p);
      code.storePair(8 * (p.k + m * p.length));
    },
  );
}
