import type { Account } from './accounts.ts';
import type { Ledger } from './ledger.ts';

/**
 * A solute that can never leave (it circulates in a closed loop and no law takes it out) has no steady state of its
 * own: any amount will do. In each such set one row is replaced by "the sum stays as it is".
 */
export function holdWhatOnlyCirculates(ledger: Ledger, accounts: readonly Account[]): void {
  const joined = new Map<number, number[]>();
  const downstream = new Map<number, number[]>();
  const push = (m: Map<number, number[]>, a: number, b: number): void => {
    const list = m.get(a);
    if (list) list.push(b);
    else m.set(a, [b]);
  };
  for (const f of ledger.fluxes) {
    for (let i = 0; i < f.targets.length; i += 2) {
      const [from, to] = [f.targets[i], f.targets[i + 1]];
      if (from < 0 || to < 0) continue;
      push(joined, from, to);
      push(joined, to, from);
      push(downstream, to, from);
      // Transfer goes either way.
      if (f.kernel.name.startsWith('transfer ')) push(downstream, from, to);
    }
  }
  for (const a of accounts) {
    if (a.unit !== 'kg') continue;
    const escapes = reach(a.left, downstream);
    const caught = new Set(a.held.filter((i) => !escapes.has(i)));
    while (caught.size > 0) {
      const [first] = caught;
      const set = [...reach([first], joined)].filter((i) => caught.has(i));
      ledger.steady[first] = { keepsSumOf: set };
      for (const i of set) caught.delete(i);
    }
  }
}

function reach(from: readonly number[], edges: ReadonlyMap<number, readonly number[]>): Set<number> {
  const seen = new Set(from);
  const queue = [...from];
  for (let q = 0; q < queue.length; q++)
    for (const next of edges.get(queue[q]) ?? [])
      if (!seen.has(next)) {
        seen.add(next);
        queue.push(next);
      }
  return seen;
}
