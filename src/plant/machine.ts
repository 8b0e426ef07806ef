import { partialsOf } from '../math/kernel.ts';
import { type Address, functionsFor, type Instance } from '../math/machine/affine.ts';
import { accumulate, Calls, evaluate, orderOf } from '../math/machine/kernels.ts';
import { BASE, Code, encodeModule } from '../math/machine/module.ts';
import { region } from '../math/machine/store.ts';
import type { F, Native, Pattern } from '../solve/system.ts';
import type { Derivative, Share } from './derivative.ts';
import type { Group } from './groups.ts';

/** What of a plant is to become code: groups by what they do. Addresses on the board are numbers from its start. */
export interface Formulas {
  /** Numbers on the board [x | w | p | z], and of places. */
  readonly board: number;
  readonly places: number;
  readonly still: readonly Group[];
  readonly moving: readonly Group[];
  readonly fluxes: readonly Group[];
  readonly outputs: readonly Group[];
  readonly guards: readonly Group[];
  readonly outputCount: number;
  readonly guardCount: number;
  /** Worked out when first asked for: most runs need A alone. */
  readonly derivative: (name: DerivativeName) => Derivative;
}

export type DerivativeName = 'A' | 'B' | 'C' | 'D';

/** Signals that no state enters; signals; dx/dt; outputs; guards. */
export type Part = 'still' | 'moving' | 'fluxes' | 'outputs' | 'guards';

/** A plant as something that runs: arrays, and what can be done with them. */
export interface Machine {
  readonly board: F;
  /** dx/dt; what leaves for nowhere is not seen. */
  readonly change: F;
  readonly outputs: F;
  readonly guards: F;
  run(part: Part): void;
  /** A derivative with the board as it is. */
  derive(name: DerivativeName, values: F): void;
  /** For who works in the same memory; the oracle has none. */
  readonly native?: Native;
}

/** Numbers of each array, from the start of the region. */
interface Places {
  readonly board: number;
  readonly change: number;
  /** Values of all fluxes. */
  readonly fluxes: number;
  readonly outputs: number;
  readonly guards: number;
  readonly end: number;
}

/** Hands out numbers of a region, each array of even length. */
function allotment(): { take(count: number): number; readonly end: number } {
  let end = 0;
  return {
    take(count) {
      const at = end;
      end += 2 * Math.ceil(count / 2);
      return at;
    },
    get end() {
      return end;
    },
  };
}

function placesOf(f: Formulas): Places {
  const all = allotment();
  return {
    board: all.take(f.board),
    change: all.take(f.places),
    fluxes: all.take(f.fluxes.reduce((s, g) => s + g.entries.length * g.kernel.outputs.length, 0)),
    outputs: all.take(f.outputCount),
    guards: all.take(f.guardCount),
    end: all.end,
  };
}

/** A module, the functions of each of its parts in their order, and what it calls. */
interface Compiled {
  readonly module: WebAssembly.Module;
  readonly parts: ReadonlyMap<string, readonly string[]>;
  readonly calls: Calls;
}

/** The code of one structure; plants of that structure differ in their numbers alone and share it. */
export class Blueprint {
  readonly #formulas: Formulas;
  readonly #at: Places;
  #main: Compiled | null = null;
  readonly #derivatives = new Map<DerivativeName, DerivativeCode>();

  constructor(f: Formulas) {
    this.#formulas = f;
    this.#at = placesOf(f);
  }

  #compiled(): Compiled {
    const f = this.#formulas;
    const at = this.#at;
    this.#main ??= compiled((calls) => [
      ['still', writeGroups(f.still, at.board, at.board, calls)],
      ['moving', writeGroups(f.moving, at.board, at.board, calls)],
      ['fluxes', [...writeFluxes(f.fluxes, at, calls), ...writeBalances(f.fluxes, at, f.places)]],
      ['outputs', writeGroups(f.outputs, at.board, at.outputs, calls)],
      ['guards', writeGroups(f.guards, at.board, at.guards, calls)],
    ]);
    return this.#main;
  }

  pattern(name: DerivativeName): Pattern {
    return this.#formulas.derivative(name).pattern;
  }

  /** A plant of this structure, in a memory region of its own. */
  machine(): Machine {
    const f = this.#formulas;
    const at = this.#at;
    const own = region(at.end);
    const parts = opened(this.#compiled(), own.memory);
    const { base } = own;
    const board = own.view(at.board, f.board);
    const derivatives = new Map<DerivativeName, (board: F, values: F) => void>();
    const part = (name: Part): (() => void) => {
      const list = parts.get(name) ?? [];
      return () => {
        for (let i = 0; i < list.length; i++) list[i](base);
      };
    };
    const runs: Record<Part, () => void> = {
      still: part('still'),
      moving: part('moving'),
      fluxes: part('fluxes'),
      outputs: part('outputs'),
      guards: part('guards'),
    };
    return {
      board,
      change: own.view(at.change, f.places),
      outputs: own.view(at.outputs, f.outputCount),
      guards: own.view(at.guards, f.guardCount),
      run: (name) => runs[name](),
      derive: (name, values) => {
        let made = derivatives.get(name);
        if (made === undefined) {
          made = this.#code(name).open();
          derivatives.set(name, made);
        }
        made(board, values);
      },
      native: {
        memory: own.memory,
        base,
        x: 8 * at.board,
        change: 8 * at.change,
        functions: [...(parts.get('moving') ?? []), ...(parts.get('fluxes') ?? [])],
      },
    };
  }

  #code(name: DerivativeName): DerivativeCode {
    const made =
      this.#derivatives.get(name) ??
      new DerivativeCode(this.#formulas.derivative(name), name, this.#formulas.board);
    this.#derivatives.set(name, made);
    return made;
  }
}

/** The code of one derivative, on a board of its own. */
class DerivativeCode {
  readonly #compiled: Compiled;
  readonly #board: number;
  readonly #values: { readonly at: number; readonly count: number };
  readonly #end: number;

  constructor(d: Derivative, name: DerivativeName, board: number) {
    const all = allotment();
    const at = all.take(board);
    const chain = all.take(d.chain.values.length);
    const count = d.pattern.column.length;
    const values = all.take(count);
    const which = name === 'A' || name === 'C' ? 'x' : 'w';
    this.#board = board;
    this.#values = { at: values, count };
    this.#end = all.end;
    this.#compiled = compiled((calls) => [
      [
        'derivative',
        [
          ...(d.chain.values.length === 1
            ? []
            : [
                cleared(chain, d.chain.values.length),
                ...writeShares(d.chain.shares, which, at, chain, chain, calls),
              ]),
          cleared(values, count),
          ...writeShares(d.shares, which, at, values, chain, calls),
        ],
      ],
    ]);
  }

  open(): (board: F, values: F) => void {
    const own = region(this.#end);
    const list = opened(this.#compiled, own.memory).get('derivative') ?? [];
    const board = own.view(0, this.#board);
    const values = own.view(this.#values.at, this.#values.count);
    const { base } = own;
    return (from, to) => {
      board.set(from);
      for (let i = 0; i < list.length; i++) list[i](base);
      to.set(values);
    };
  }
}

function compiled(write: (calls: Calls) => readonly (readonly [string, readonly Code[]])[]): Compiled {
  const calls = new Calls();
  const list = write(calls);
  const parts = new Map(list.map(([part, codes]) => [part, codes.map((_, i) => `${part}.${i}`)]));
  const exported = new Map<string, number>();
  [...parts.values()].flat().forEach((name, i) => {
    exported.set(name, calls.list.length + i);
  });
  const functions = list.flatMap(([, codes]) => codes);
  return { module: new WebAssembly.Module(encodeModule(calls.list, functions, exported)), parts, calls };
}

function opened({ module, parts, calls }: Compiled, memory: WebAssembly.Memory) {
  const imports = Object.fromEntries(calls.list.map((c) => [c.name, c.f]));
  const { exports } = new WebAssembly.Instance(module, { m: { memory }, f: imports });
  return new Map(
    [...parts].map(([part, names]) => [part, names.map((n) => exports[n] as (base: number) => void)]),
  );
}

function cleared(from: number, count: number): Code {
  return new Code(0)
    .get(BASE)
    .integerConstant(8 * from)
    .addIntegers()
    .integerConstant(0)
    .integerConstant(8 * count)
    .fill();
}

interface KernelInstance extends Instance {
  readonly group: Group;
}

/** The instances of groups in their order; arguments from the board, results to the array that begins at `to`. */
function writeGroups(groups: readonly Group[], board: number, to: number, calls: Calls): Code[] {
  const list = groups.flatMap((group, g): KernelInstance[] => {
    const args = group.kernel.args.length;
    const stride = group.references.length / group.entries.length;
    return group.entries.map((_, i) => ({
      group,
      shape: String(g),
      at: Array.from(
        group.references.subarray(i * stride, (i + 1) * stride),
        (r, k) => 8 * (r + (k < args ? board : to)),
      ),
    }));
  });
  return writeKernels(list, calls);
}

/** The values of all fluxes, one after the other. */
function writeFluxes(groups: readonly Group[], at: Places, calls: Calls): Code[] {
  let next = at.fluxes;
  const list = groups.flatMap((group, g): KernelInstance[] => {
    const { args, outputs } = group.kernel;
    const stride = group.references.length / group.entries.length;
    return group.entries.map((_, i) => {
      const own = group.references.subarray(i * stride, i * stride + args.length);
      const to = outputs.map((__, k) => 8 * (next + k));
      next += outputs.length;
      return { group, shape: String(g), at: [...Array.from(own, (r) => 8 * (at.board + r)), ...to] };
    });
  });
  return writeKernels(list, calls);
}

/**
 * dx/dt of each place: the sum of its fluxes, in their order. Taking each flux from one place and adding it to the next
 * would make every sum wait for the one before.
 */
function writeBalances(groups: readonly Group[], at: Places, places: number): Code[] {
  const terms: { flux: number; sign: 1 | -1 }[][] = Array.from({ length: places }, () => []);
  let flux = at.fluxes;
  for (const { entries } of groups)
    for (const { targets } of entries)
      for (let k = 0; k < targets.length; k += 2, flux++) {
        terms[targets[k]]?.push({ flux, sign: -1 });
        terms[targets[k + 1]]?.push({ flux, sign: 1 });
      }
  const list = terms.map((own, i) => ({
    own,
    shape: own.map((t) => (t.sign > 0 ? '+' : '-')).join(''),
    at: [8 * (at.change + i), ...own.map((t) => 8 * t.flux)],
  }));
  return functionsFor(list, (code, { own }, address) => {
    code.get(address(0).local).constant(0);
    own.forEach((t, k) => {
      const { local, offset } = address(1 + k);
      code
        .get(local)
        .load(offset)
        .binary(t.sign > 0 ? 'add' : 'sub');
    });
    code.store(address(0).offset);
  });
}

function writeKernels(list: readonly KernelInstance[], calls: Calls): Code[] {
  return functionsFor(list, (code, { group: { kernel } }, address) => {
    const args = kernel.args.length;
    evaluate(code, kernel.outputs, address, calls).forEach((value, i) => {
      const { local, offset } = address(args + i);
      code.get(local).get(value).store(offset);
    });
  });
}

interface ShareInstance extends Instance {
  readonly share: Share;
}

/** Partials of instances, times their chain factors, added up where they belong. */
function writeShares(
  shares: readonly Share[],
  which: 'x' | 'w',
  board: number,
  to: number,
  chain: number,
  calls: Calls,
): Code[] {
  const numbers = new Map<Group, number>();
  const list = shares
    .filter((s) => s.products.length > 0)
    .map((share): ShareInstance => {
      const { group, entry, products } = share;
      if (!numbers.has(group)) numbers.set(group, numbers.size);
      const stride = group.references.length / group.entries.length;
      const args = group.references.subarray(entry * stride, entry * stride + group.kernel.args.length);
      return {
        share,
        shape: `${numbers.get(group)}:${products.map((p) => `${p.pair}${p.sign > 0 ? '+' : '-'}${p.chain === 0 ? '' : '*'}`)}`,
        at: [
          ...Array.from(args, (r) => 8 * (board + r)),
          ...products.flatMap((p) => [8 * (to + p.to), ...(p.chain === 0 ? [] : [8 * (chain + p.chain)])]),
        ],
      };
    });
  return functionsFor(list, (code, { share: { group, products } }, address) => {
    const partials = partialsOf(group.kernel, group.pairs[which]);
    const values = evaluate(code, partials, address, calls);
    let k = group.kernel.args.length;
    const product = code.spare(orderOf(partials).length);
    for (const p of products) {
      const target: Address = address(k++);
      let value = values[p.pair];
      if (p.chain !== 0) {
        const { local, offset } = address(k++);
        code.get(value).get(local).load(offset).binary('mul').set(product);
        value = product;
      }
      accumulate(code, target, value, p.sign);
    }
  });
}
