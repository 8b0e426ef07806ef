import type { Phase } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';
import type { Book } from './book.ts';
import type { Totals } from './boundary.ts';
import type { Ref } from './ledger.ts';

/** The account of one conserved quantity: a solute, a species carrier w, or the volume of a phase. */
export interface Account {
  readonly name: string;
  readonly unit: string;
  readonly held: readonly number[];
  /** Held where it cannot change (full vessels), in `unit`. */
  readonly fixed: number;
  readonly entered: readonly number[];
  readonly left: readonly number[];
}

/** Accounts over the places of a ledger; also tells the ledger what is conserved. */
export function accounts(
  book: Book,
  totals: readonly Totals[],
  levels: readonly { phase: Phase; place: Ref }[],
  fixedVolume: Readonly<Record<Phase, number>>,
): Account[] {
  const n = book.solutes + book.s.species.length;
  const side = (
    list: readonly Totals[],
    which: 'in' | 'out',
    pick: (t: Totals) => Ref | undefined,
  ): number[] => list.filter((t) => t.side === which).flatMap((t) => pick(t)?.index ?? []);
  const components = Array.from({ length: n }, (_, k): Account => {
    const held = book.ledger.places.flatMap((p, i) =>
      p.kind === 'amount' && p.path.endsWith(`.${book.name(k)}`) ? [i] : [],
    );
    const pick = (t: Totals): Ref | undefined => t.components[k];
    return {
      name: book.name(k),
      unit: 'kg',
      held,
      fixed: 0,
      entered: side(totals, 'in', pick),
      left: side(totals, 'out', pick),
    };
  });
  const volumes = (['aqueous', 'organic'] as const).map((phase): Account => {
    const own = totals.filter((t) => t.phase === phase);
    return {
      name: phase,
      unit: 'm^3',
      held: levels.filter((l) => l.phase === phase).map((l) => l.place.index),
      fixed: fixedVolume[phase],
      entered: side(own, 'in', (t) => t.volume),
      left: side(own, 'out', (t) => t.volume),
    };
  });
  const all = [...components, ...volumes];
  for (const a of all) book.ledger.conserve(a.name, [...a.held, ...a.entered, ...a.left]);
  return all;
}

export interface Closure {
  readonly name: string;
  readonly unit: string;
  readonly entered: number;
  readonly left: number;
  readonly heldBefore: number;
  readonly heldAfter: number;
  /** |held(t) − held(0) − in + out| / (in + held(0)); 0/0 counts as 0. */
  readonly closure: number;
}

/** Balance of an account between two states of one run (totals start at zero). */
export function closure(a: Account, before: F, after: F): Closure {
  const sum = (x: F, list: readonly number[]): number => list.reduce((s, i) => s + x[i], 0);
  const entered = sum(before, a.entered) - sum(after, a.entered);
  const left = sum(after, a.left) - sum(before, a.left);
  const heldBefore = a.fixed + sum(before, a.held);
  const heldAfter = a.fixed + sum(after, a.held);
  const open = Math.abs(heldAfter - heldBefore - entered + left);
  // A base brings less than none of an acid: each stream counts by its size.
  const size = a.entered.reduce((n, i) => n + Math.abs(after[i] - before[i]), 0) + Math.abs(heldBefore);
  return {
    name: a.name,
    unit: a.unit,
    entered,
    left,
    heldBefore,
    heldAfter,
    closure: open === 0 ? 0 : open / size,
  };
}
