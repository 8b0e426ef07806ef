import type { Derive, Effect, Execution, Kernel, Pair, Run } from '../math/kernel.ts';
import { dependencies } from '../math/kernel.ts';
import type { Entry, Ledger, Ref } from './ledger.ts';

/** What a value depends on in the end: states, inputs, both or neither. */
export interface Activity {
  readonly x: boolean;
  readonly w: boolean;
}

/** Instances of one kernel whose arguments depend on the same kinds of thing, carried out in one loop. */
export interface Group {
  readonly kernel: Kernel;
  readonly entries: readonly Entry[];
  readonly activity: readonly Activity[];
  readonly references: Int32Array;
  readonly run: Run;
  readonly pairs: { readonly x: readonly Pair[]; readonly w: readonly Pair[] };
  readonly derive: { readonly x: Derive; readonly w: Derive };
}

export interface Layout {
  address(r: Ref): number;
  /** Address of a target index in the array that this kind of entry writes to. */
  target(index: number): number;
}

/** Activity of every signal, in order: a signal inherits what its arguments depend on. */
export function signalActivity(ledger: Ledger): Activity[] {
  const known: Activity[] = new Array(ledger.signalCount);
  for (const e of ledger.signals) {
    const args = e.args.map((r) => activityOf(r, known));
    const joined = { x: args.some((a) => a.x), w: args.some((a) => a.w) };
    for (const t of e.targets) known[t] = joined;
  }
  return known;
}

export function activityOf(r: Ref, signals: readonly Activity[]): Activity {
  return r.space === 'z' ? signals[r.index] : { x: r.space === 'x', w: r.space === 'w' };
}

/** How many layers of signals lie below each signal: a layer may only be computed after those below it. */
export function signalLevel(ledger: Ledger): number[] {
  const level: number[] = new Array(ledger.signalCount).fill(0);
  for (const e of ledger.signals) {
    const below = e.args.map((r) => (r.space === 'z' ? level[r.index] + 1 : 0));
    for (const t of e.targets) level[t] = Math.max(0, ...below);
  }
  return level;
}

export function group(
  entries: readonly Entry[],
  effect: Effect,
  execution: Execution | null,
  signals: readonly Activity[],
  layout: Layout,
  levelOf: (e: Entry) => number = () => 0,
): Group[] {
  const kernels = new Map<Kernel, number>();
  const bins = new Map<string, Entry[]>();
  for (const e of entries) {
    if (!kernels.has(e.kernel)) kernels.set(e.kernel, kernels.size);
    const signature = e.args.map((r) => code(activityOf(r, signals))).join('');
    const key = `${String(levelOf(e)).padStart(6, '0')}:${kernels.get(e.kernel)}:${signature}`;
    const bin = bins.get(key);
    if (bin) bin.push(e);
    else bins.set(key, [e]);
  }
  return [...bins]
    .sort(([a], [b]) => a.localeCompare(b, 'en', { numeric: true }))
    .map(([, list]) => makeGroup(list, effect, execution, signals, layout));
}

const code = (a: Activity): string => `${a.x ? 'x' : '-'}${a.w ? 'w' : '-'}`;

function makeGroup(
  entries: readonly Entry[],
  effect: Effect,
  execution: Execution | null,
  signals: readonly Activity[],
  layout: Layout,
): Group {
  const k = entries[0].kernel;
  const activity = entries[0].args.map((r) => activityOf(r, signals));
  const pairs = {
    x: dependencies(k, (i) => activity[i].x),
    w: dependencies(k, (i) => activity[i].w),
  };
  const references = Int32Array.from(
    entries.flatMap((e) => [...e.args.map(layout.address), ...e.targets.map(layout.target)]),
  );
  const compiled = execution === null ? apart : once(k, execution, effect, pairs);
  return { kernel: k, entries, activity, references, pairs, ...compiled };
}

interface Compiled {
  readonly run: Run;
  readonly derive: { readonly x: Derive; readonly w: Derive };
}

/** Groups that are carried out by the code of the whole plant have none of their own. */
const none: Run = () => {
  throw new Error('this group is part of a machine');
};
const apart: Compiled = { run: none, derive: { x: none, w: none } };

const cache = new WeakMap<Kernel, Map<string, Compiled>>();

/** Kernels are shared by plants, so their code is made once a process; derivatives only when first asked for. */
function once(k: Kernel, execution: Execution, effect: Effect, pairs: Group['pairs']): Compiled {
  let known = cache.get(k);
  if (!known) {
    known = new Map();
    cache.set(k, known);
  }
  const key = JSON.stringify([execution.name, effect, pairs]);
  const found = known.get(key);
  if (found) return found;
  const lazily = (which: readonly Pair[]): Derive => {
    let made: Derive | null = null;
    return (count, r, v, y) => {
      made ??= execution.derive(k, which);
      made(count, r, v, y);
    };
  };
  const compiled = { run: execution.run(k, effect), derive: { x: lazily(pairs.x), w: lazily(pairs.w) } };
  known.set(key, compiled);
  return compiled;
}
