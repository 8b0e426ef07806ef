import { BASE, Code } from './module.ts';

/** One instance of an operation: what it does, and the addresses [bytes beyond the base] that it does it to. */
export interface Instance {
  /** Instances of one shape do the same to other addresses. */
  readonly shape: string;
  readonly at: readonly number[];
}

/** Where an address of an instance is found while the code runs: a local plus an offset. */
export interface Address {
  readonly local: number;
  readonly offset: number;
}

/** Instances that follow each other with one and the same distance in every address. */
export interface Run<I extends Instance> {
  readonly first: I;
  readonly count: number;
  /** Bytes from one instance to the next, by address. */
  readonly steps: readonly number[];
}

/** Runs shorter than this are written out. */
const WORTH_A_LOOP = 3;

/** Instances in their order as runs, each as long as it goes: in a train of equal stages few, however long it is. */
export function runsOf<I extends Instance>(list: readonly I[]): Run<I>[] {
  const runs: Run<I>[] = [];
  for (let i = 0; i < list.length; ) {
    const first = list[i];
    const next = list[i + 1];
    let count = 1;
    let steps: number[] = [];
    if (next !== undefined && next.shape === first.shape) {
      steps = next.at.map((a, k) => a - first.at[k]);
      count = 2;
      while (i + count < list.length && follows(list[i + count - 1], list[i + count], steps)) count += 1;
    }
    if (count >= WORTH_A_LOOP && steps.some((s) => s !== 0)) {
      runs.push({ first, count, steps });
      i += count;
    } else {
      runs.push({ first, count: 1, steps: first.at.map(() => 0) });
      i += 1;
    }
  }
  return runs;
}

function follows(a: Instance, b: Instance, steps: readonly number[]): boolean {
  if (a.shape !== b.shape) return false;
  for (let k = 0; k < steps.length; k++) if (b.at[k] - a.at[k] !== steps[k]) return false;
  return true;
}

/** Bytes of code in one function, about; smaller ones are compiled better and sooner. */
const FUNCTION_SIZE = 12_000;

/**
 * Functions that carry out the instances in their order: a loop for each run, its addresses held in one local for each
 * distance, everything else in offsets. `body` writes the code of one instance.
 */
export function functionsFor<I extends Instance>(
  list: readonly I[],
  body: (code: Code, instance: I, address: (k: number) => Address) => void,
): Code[] {
  const runs = runsOf(list);
  const distances = Math.max(0, ...runs.map((r) => new Set(r.steps.filter((s) => s !== 0)).size));
  const made: Code[] = [];
  let code = new Code(distances);
  for (const run of runs) {
    if (code.length > FUNCTION_SIZE) {
      made.push(code);
      code = new Code(distances);
    }
    write(code, run, body);
  }
  if (code.length > 0) made.push(code);
  return made;
}

function write<I extends Instance>(
  code: Code,
  { first, count, steps }: Run<I>,
  body: (code: Code, instance: I, address: (k: number) => Address) => void,
): void {
  const moving = [...new Set(steps.filter((s) => s !== 0))];
  // A pointer that goes down starts high, so that no address lies below the base.
  const starts = moving.map((s) => (s < 0 ? -s * (count - 1) : 0));
  const locals = moving.map((_, j) => code.integer(j));
  const address = (k: number): Address => {
    const j = moving.indexOf(steps[k]);
    return j < 0
      ? { local: BASE, offset: first.at[k] }
      : { local: locals[j], offset: first.at[k] - starts[j] };
  };
  if (count === 1) {
    body(code, first, address);
    return;
  }
  locals.forEach((local, j) => {
    code.get(BASE);
    if (starts[j] !== 0) code.integerConstant(starts[j]).addIntegers();
    code.set(local);
  });
  code.repeat(locals[0], moving[0], starts[0] + moving[0] * count, () => {
    body(code, first, address);
    for (let j = 1; j < moving.length; j++)
      code.get(locals[j]).integerConstant(moving[j]).addIntegers().set(locals[j]);
  });
}
