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

/** A block of instances that repeats, every address moving on by one and the same distance each time. */
export interface Run<I extends Instance> {
  readonly block: readonly I[];
  readonly count: number;
  /** Bytes from one block to the next, by instance and address. */
  readonly steps: readonly (readonly number[])[];
}

/** Blocks that repeat less often than this are written out. */
const WORTH_A_LOOP = 3;
/** Instances in a block at most: what one stage of a train has of one kind. */
const LONGEST_BLOCK = 40;

/** Instances in their order as runs, each as long as it goes: in a train of equal stages few, however long it is. */
export function runsOf<I extends Instance>(list: readonly I[]): Run<I>[] {
  const runs: Run<I>[] = [];
  for (let i = 0; i < list.length; ) {
    const [period, count] = repetition(list, i);
    const block = list.slice(i, i + period);
    const steps = block.map(({ at }, j) =>
      count === 1 ? at.map(() => 0) : at.map((a, k) => list[i + j + period].at[k] - a),
    );
    runs.push({ block, count, steps });
    i += period * count;
  }
  return runs;
}

/** The shortest block from `i` on that repeats over the longest stretch, and how often; one instance, once, where none does. */
function repetition(list: readonly Instance[], i: number): [period: number, count: number] {
  let best: [number, number] = [1, 1];
  for (let period = 1; period <= LONGEST_BLOCK && i + WORTH_A_LOOP * period <= list.length; period++) {
    // A block must repeat as a whole, so the shapes of its first instance tell most of the others apart.
    if (list[i].shape !== list[i + period].shape || list[i].shape !== list[i + 2 * period].shape) continue;
    let length = 2 * period;
    while (i + length < list.length && goesOn(list, i + length, period)) length += 1;
    const count = Math.floor(length / period);
    if (count < WORTH_A_LOOP || !alike(list, i, period) || !moves(list, i, period)) continue;
    if (count * period > best[0] * best[1]) best = [period, count];
  }
  return best;
}

/** Whether instance `n` is as far from the one a period before as that is from the one before it. */
function goesOn(list: readonly Instance[], n: number, period: number): boolean {
  const [a, b, c] = [list[n - 2 * period], list[n - period], list[n]];
  if (b.shape !== c.shape || a.shape !== b.shape) return false;
  for (let k = 0; k < c.at.length; k++) if (c.at[k] - b.at[k] !== b.at[k] - a.at[k]) return false;
  return true;
}

/** Whether the second block has the shapes of the first. */
function alike(list: readonly Instance[], i: number, period: number): boolean {
  for (let j = 0; j < period; j++) if (list[i + j].shape !== list[i + j + period].shape) return false;
  return true;
}

/** A loop needs something that moves. */
const moves = (list: readonly Instance[], i: number, period: number): boolean =>
  list.slice(i, i + period).some(({ at }, j) => at.some((a, k) => list[i + j + period].at[k] !== a));

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
  const distances = runs.reduce((most, r) => Math.max(most, distancesOf(r).length), 0);
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

const distancesOf = ({ steps }: Pick<Run<Instance>, 'steps'>): number[] => {
  const found: number[] = [];
  for (const own of steps) for (const s of own) if (s !== 0 && !found.includes(s)) found.push(s);
  return found;
};

function write<I extends Instance>(
  code: Code,
  { block, count, steps }: Run<I>,
  body: (code: Code, instance: I, address: (k: number) => Address) => void,
): void {
  const moving = distancesOf({ steps });
  // A pointer that goes down starts high, so that no address lies below the base.
  const starts = moving.map((s) => (s < 0 ? -s * (count - 1) : 0));
  const locals = moving.map((_, j) => code.integer(j));
  const all = (): void => {
    block.forEach((instance, n) => {
      body(code, instance, (k) => {
        const j = moving.indexOf(steps[n][k]);
        return j < 0
          ? { local: BASE, offset: instance.at[k] }
          : { local: locals[j], offset: instance.at[k] - starts[j] };
      });
    });
  };
  if (count === 1) {
    all();
    return;
  }
  locals.forEach((local, j) => {
    code.get(BASE);
    if (starts[j] !== 0) code.integerConstant(starts[j]).addIntegers();
    code.set(local);
  });
  code.repeat(locals[0], moving[0], starts[0] + moving[0] * count, () => {
    all();
    for (let j = 1; j < moving.length; j++)
      code.get(locals[j]).integerConstant(moving[j]).addIntegers().set(locals[j]);
  });
}
