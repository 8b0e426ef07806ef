import { add, type Expr, mul, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';

/*
 * Species set free by the transfer (the acid of a cation exchanger) are carried as w = m_species + Σ rᵢ·m_a,i in
 * every aqueous vessel. Transfer takes m_a,i and gives rᵢ times as much species, so it cancels in w exactly: w is
 * pure transport and has an ordinary closure.
 */

const made = new Map<string, Kernel>();
const once = (key: string, make: () => Kernel): Kernel => {
  const found = made.get(key) ?? make();
  made.set(key, found);
  return found;
};

const pairs = (n: number): string[] =>
  Array.from({ length: n }, (_, i) => [`release ${i + 1}`, `solute ${i + 1}`]).flat();

const released = (args: readonly Expr[]): Expr =>
  add(...Array.from({ length: args.length / 2 }, (_, i) => mul(args[2 * i], args[2 * i + 1])));

/** Flux of w in a feed with n releasing solutes: q·(c_species + Σ rᵢ·cᵢ). */
export const fedCarrier = (n: number): Kernel =>
  once(`fed ${n}`, () =>
    kernel(`fed carrier of ${n}`, ['flow', 'content', ...pairs(n)], (q, c, ...rest) =>
      mul(q, add(c, released(rest))),
    ),
  );

/** Species concentration from w: (w − Σ rᵢ·m_a,i)/V. */
export const speciesConcentration = (n: number): Kernel =>
  once(`species ${n}`, () =>
    kernel(`species of ${n}`, ['carrier', 'perVolume', ...pairs(n)], (w, i, ...rest) =>
      mul(sub(w, released(rest)), i),
    ),
  );
