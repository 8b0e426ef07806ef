import type { F, Pattern } from '../solve/system.ts';
import type { Group } from './groups.ts';
import type { Ref } from './ledger.ts';

/** A row of the derivative of a sink: which partials of its groups enter it, with which sign. */
interface Term {
  readonly row: number;
  readonly partial: number;
  readonly arg: Ref;
  readonly sign: 1 | -1;
}

/** destination += sign · partial of a pair · chain factor. */
export interface Product {
  /** Which of the pairs of its group. */
  readonly pair: number;
  readonly to: number;
  /** Slot of the chain; 0 is the constant 1. */
  readonly chain: number;
  readonly sign: 1 | -1;
}

/** One instance of a group, and all products that its partials enter. */
export interface Share {
  readonly group: Group;
  /** Number of the entry in its group. */
  readonly entry: number;
  readonly products: readonly Product[];
}

/**
 * Exact sparse derivative of a set of groups with respect to the states ('x') or the inputs ('w').
 *
 * With z the signals, ∂f/∂x = ∂f/∂x|z + ∂f/∂z · ∂z/∂x. Both products are worked out beforehand as lists of
 * (destination, partial, chain factor), so that a call is a few flat loops. The chain factor of a direct
 * argument is the constant 1, kept in slot 0 of the chain array.
 */
export class Derivative {
  readonly pattern: Pattern;
  readonly #chain: SignalChain;
  readonly #groups: readonly Group[];
  readonly #which: 'x' | 'w';
  readonly #partials: readonly F[];
  readonly #products: Products;
  /** The same as instances in their order, for generated code. */
  readonly shares: readonly Share[];

  constructor(groups: readonly Group[], rows: number, which: 'x' | 'w', chain: SignalChain) {
    this.#groups = groups.filter((g) => g.pairs[which].length > 0);
    this.#which = which;
    this.#chain = chain;
    const buffers = allocate(this.#groups, which);
    this.#partials = buffers.views;
    const terms = this.#groups.flatMap((g, i) => termsOf(g, which, buffers.starts[i], rows));
    const columns: Set<number>[] = Array.from({ length: rows }, () => new Set());
    for (const t of terms) for (const c of chain.columnsOf(t.arg)) columns[t.row].add(c.column);
    this.pattern = patternOf(columns);
    const slot = slotFinder(this.pattern);
    const products = new Products(buffers.all, chain.values);
    const shares = new Shares(this.#groups, which, buffers.starts);
    for (const t of terms)
      for (const c of chain.columnsOf(t.arg)) {
        const to = slot(t.row, c.column);
        products.push(to, t.partial, c.slot, t.sign);
        shares.push(t.partial, to, c.slot, t.sign);
      }
    this.#products = products.close();
    this.shares = shares.list;
  }

  get chain(): SignalChain {
    return this.#chain;
  }

  /** `board` must hold current values, signals included; the chain must have been evaluated on it. */
  evaluate(board: F, values: F): void {
    this.#chain.evaluate(board);
    for (let i = 0; i < this.#groups.length; i++) {
      const g = this.#groups[i];
      g.derive[this.#which](g.entries.length, g.references, board, this.#partials[i]);
    }
    values.fill(0);
    this.#products.addTo(values);
  }
}

/** ∂z/∂x or ∂z/∂w of all signals, in layers from below. */
export class SignalChain {
  readonly values: F;
  readonly #direct: 'x' | 'w';
  readonly #columns: { column: number; slot: number }[][];
  readonly #groups: readonly Group[];
  readonly #partials: readonly F[];
  readonly #products: Products;
  readonly shares: readonly Share[];

  constructor(groups: readonly Group[], signals: number, which: 'x' | 'w') {
    this.#direct = which;
    this.#groups = groups.filter((g) => g.pairs[which].length > 0);
    const buffers = allocate(this.#groups, which);
    this.#partials = buffers.views;
    this.#columns = Array.from({ length: signals }, () => []);
    const pending: [dest: number, partial: number, chain: number][] = [];
    let slots = 1;
    this.#groups.forEach((g, i) => {
      for (const t of termsOf(g, which, buffers.starts[i], signals)) {
        const own = this.#columns[t.row];
        for (const c of this.columnsOf(t.arg)) {
          let at = own.find((o) => o.column === c.column);
          if (!at) {
            at = { column: c.column, slot: slots };
            slots += 1;
            own.push(at);
          }
          pending.push([at.slot, t.partial, c.slot]);
        }
      }
    });
    this.values = new Float64Array(slots);
    const products = new Products(buffers.all, this.values);
    const shares = new Shares(this.#groups, which, buffers.starts);
    for (const [to, partial, from] of pending) {
      products.push(to, partial, from, 1);
      shares.push(partial, to, from, 1);
    }
    this.#products = products.close();
    this.shares = shares.list;
  }

  columnsOf(r: Ref): readonly { readonly column: number; readonly slot: number }[] {
    if (r.space === 'z') return this.#columns[r.index];
    return r.space === this.#direct ? [{ column: r.index, slot: 0 }] : [];
  }

  evaluate(board: F): void {
    if (this.values.length === 1) {
      this.values[0] = 1;
      return;
    }
    for (let i = 0; i < this.#groups.length; i++) {
      const g = this.#groups[i];
      g.derive[this.#direct](g.entries.length, g.references, board, this.#partials[i]);
    }
    this.values.fill(0);
    this.values[0] = 1;
    this.#products.addTo(this.values);
  }
}

/** A list of destination += sign · partial · chain factor. */
class Products {
  readonly #partials: F;
  readonly #chain: F;
  #list: number[] = [];
  #flat = new Int32Array(0);

  constructor(partials: F, chain: F) {
    this.#partials = partials;
    this.#chain = chain;
  }

  push(dest: number, partial: number, chain: number, sign: 1 | -1): void {
    this.#list.push(dest, partial, chain, sign);
  }

  close(): this {
    this.#flat = Int32Array.from(this.#list);
    this.#list = [];
    return this;
  }

  addTo(values: F): void {
    const list = this.#flat;
    const p = this.#partials;
    const c = this.#chain;
    for (let k = 0; k < list.length; k += 4)
      values[list[k]] += list[k + 3] * (p[list[k + 1]] * c[list[k + 2]]);
  }
}

/** Gathers products by the instance whose partial they take. */
class Shares {
  readonly list: (Share & { readonly products: Product[] })[] = [];
  readonly #pairs: readonly number[];
  readonly #starts: readonly number[];
  /** Where the shares of each group begin in the list. */
  readonly #first: number[] = [];
  #group = 0;

  constructor(groups: readonly Group[], which: 'x' | 'w', starts: readonly number[]) {
    this.#pairs = groups.map((g) => g.pairs[which].length);
    this.#starts = starts;
    for (const group of groups) {
      this.#first.push(this.list.length);
      group.entries.forEach((_, entry) => {
        this.list.push({ group, entry, products: [] });
      });
    }
  }

  /** Partials come in rising order. */
  push(partial: number, to: number, chain: number, sign: 1 | -1): void {
    while (this.#group + 1 < this.#starts.length && partial >= this.#starts[this.#group + 1])
      this.#group += 1;
    const inside = partial - this.#starts[this.#group];
    const pairs = this.#pairs[this.#group];
    const entry = Math.floor(inside / pairs);
    this.list[this.#first[this.#group] + entry].products.push({ pair: inside % pairs, to, chain, sign });
  }
}

function allocate(groups: readonly Group[], which: 'x' | 'w'): { all: F; views: F[]; starts: number[] } {
  const sizes = groups.map((g) => g.entries.length * g.pairs[which].length);
  const starts: number[] = [];
  let total = 0;
  for (const s of sizes) {
    starts.push(total);
    total += s;
  }
  const all = new Float64Array(total);
  return { all, starts, views: sizes.map((s, i) => all.subarray(starts[i], starts[i] + s)) };
}

function termsOf(g: Group, which: 'x' | 'w', start: number, rows: number): Term[] {
  const pairs = g.pairs[which];
  const moves = g.entries[0].targets.length === 2 * g.kernel.outputs.length;
  return g.entries.flatMap((e, i) =>
    pairs.flatMap((pair, j): Term[] => {
      const partial = start + i * pairs.length + j;
      const arg = e.args[pair.arg];
      const term = (row: number, sign: 1 | -1): Term[] =>
        row >= 0 && row < rows ? [{ row, partial, arg, sign }] : [];
      if (!moves) return term(e.targets[pair.output], 1);
      return [...term(e.targets[2 * pair.output], -1), ...term(e.targets[2 * pair.output + 1], 1)];
    }),
  );
}

export function patternOf(columns: readonly Set<number>[]): Pattern {
  const rowStart = new Int32Array(columns.length + 1);
  const column: number[] = [];
  columns.forEach((set, i) => {
    column.push(...[...set].sort((a, b) => a - b));
    rowStart[i + 1] = column.length;
  });
  return { rowStart, column: Int32Array.from(column) };
}

function slotFinder(p: Pattern): (row: number, column: number) => number {
  const maps = Array.from({ length: p.rowStart.length - 1 }, (_, i) => {
    const m = new Map<number, number>();
    for (let k = p.rowStart[i]; k < p.rowStart[i + 1]; k++) m.set(p.column[k], k);
    return m;
  });
  return (row, column) => maps[row].get(column) as number;
}
