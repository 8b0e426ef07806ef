import { type Expr, topological } from '../math/expression.ts';
import { partialsOf } from '../math/kernel.ts';
import { type Address, functionsFor, type Instance } from '../math/machine/affine.ts';
import { accumulate, Calls, evaluate } from '../math/machine/kernels.ts';
import { BASE, Code, encodeModule } from '../math/machine/module.ts';
import { type Region, region } from '../math/machine/store.ts';
import type { F, Native } from '../solve/system.ts';
import type { Derivative, Share, SignalChain } from './derivative.ts';
import type { Group } from './groups.ts';

/** What of a plant is to become code: groups by what they do, and derivatives. */
export interface Formulas {
  /** Numbers on the board [x | w | p | z], and of places. */
  readonly board: number;
  readonly places: number;
  /** Addresses on the board are numbers from its start; targets by kind, see `Layout`. */
  readonly still: readonly Group[];
  readonly moving: readonly Group[];
  readonly fluxes: readonly Group[];
  readonly outputs: readonly Group[];
  readonly guards: readonly Group[];
  readonly outputCount: number;
  readonly guardCount: number;
  readonly derivatives: Readonly<Record<DerivativeName, Derivative>>;
}

type DerivativeName = 'A' | 'B' | 'C' | 'D';
const derivativeNames = ['A', 'B', 'C', 'D'] as const;

/** A plant as code: arrays in its memory, and what can be done with them. */
export interface Machine {
  readonly board: F;
  /** dx/dt; what leaves for nowhere is not seen. */
  readonly change: F;
  readonly outputs: F;
  readonly guards: F;
  readonly derivatives: Readonly<Record<DerivativeName, F>>;
  /** Signals that no state enters; signals; dx/dt; outputs; guards; each of the derivatives. */
  run(part: Part): void;
  /** For who works in the same memory; the oracle has none. */
  readonly native?: Native;
}

export type Part = 'still' | 'moving' | 'fluxes' | 'outputs' | 'guards' | DerivativeName;

/** Numbers of each array, from the start of the region. */
interface Places {
  readonly board: number;
  readonly change: number;
  readonly outputs: number;
  readonly guards: number;
  readonly chains: ReadonlyMap<SignalChain, number>;
  readonly derivatives: Readonly<Record<DerivativeName, number>>;
  readonly end: number;
}

function placesOf(f: Formulas): Places {
  let end = 0;
  const take = (count: number): number => {
    const at = end;
    end += 2 * Math.ceil(count / 2);
    return at;
  };
  const board = take(f.board);
  const change = take(f.places + 1);
  const outputs = take(f.outputCount);
  const guards = take(f.guardCount);
  const list = derivativeNames.map((n) => f.derivatives[n]);
  const chains = new Map([...new Set(list.map((d) => d.chain))].map((c) => [c, take(c.values.length)]));
  const derivatives = Object.fromEntries(
    derivativeNames.map((n) => [n, take(f.derivatives[n].pattern.column.length)]),
  ) as Record<DerivativeName, number>;
  return { board, change, outputs, guards, chains, derivatives, end };
}

interface Compiled {
  readonly module: WebAssembly.Module;
  /** Names of functions by part, in their order. */
  readonly parts: ReadonlyMap<Part, readonly string[]>;
  readonly calls: Calls;
}

/** Code depends on structure alone: the samples of an ensemble share it. */
const known = new Map<string, Compiled>();
const MOST_KNOWN = 32;

/** Code for a plant, made once a structure, in a memory region of its own. */
export function machineOf(f: Formulas, structure: string): Machine {
  const at = placesOf(f);
  let made = known.get(structure);
  if (made === undefined) {
    made = compiled(f, at);
    if (known.size >= MOST_KNOWN) known.delete(known.keys().next().value as string);
    known.set(structure, made);
  }
  const own = region(at.end);
  const imports = Object.fromEntries(made.calls.list.map((c) => [c.name, c.f]));
  const { exports } = new WebAssembly.Instance(made.module, { m: { memory: own.memory }, f: imports });
  const functions = exports as Record<string, (base: number) => void>;
  const parts = Object.fromEntries(
    [...made.parts].map(([part, names]) => [part, names.map((n) => functions[n])]),
  ) as Record<Part, ((base: number) => void)[]>;
  const native: Native = {
    memory: own.memory,
    base: own.base,
    x: 8 * at.board,
    change: 8 * at.change,
    functions: [...parts.moving, ...parts.fluxes],
  };
  return { ...views(f, at, own), run: runner(parts, own.base), native };
}

const runner =
  (parts: Record<Part, ((base: number) => void)[]>, base: number): Machine['run'] =>
  (part) => {
    const list = parts[part];
    for (let i = 0; i < list.length; i++) list[i](base);
  };

function views(f: Formulas, at: Places, own: Region): Omit<Machine, 'run'> {
  return {
    board: own.view(at.board, f.board),
    change: own.view(at.change, f.places),
    outputs: own.view(at.outputs, f.outputCount),
    guards: own.view(at.guards, f.guardCount),
    derivatives: Object.fromEntries(
      derivativeNames.map((n) => [n, own.view(at.derivatives[n], f.derivatives[n].pattern.column.length)]),
    ) as Record<DerivativeName, F>,
  };
}

function compiled(f: Formulas, at: Places): Compiled {
  const calls = new Calls();
  const functions: Code[] = [];
  const names = new Map<Part, string[]>();
  const add = (part: Part, list: readonly Code[]): void => {
    const own = names.get(part) ?? [];
    names.set(part, own);
    for (const code of list) {
      own.push(`${part}${own.length}`);
      functions.push(code);
    }
  };
  add('still', writeGroups(f.still, at.board, at.board, calls));
  add('moving', writeGroups(f.moving, at.board, at.board, calls));
  add('fluxes', [cleared(at.change, f.places + 1)]);
  add('fluxes', writeGroups(f.fluxes, at.board, at.change, calls));
  add('outputs', writeGroups(f.outputs, at.board, at.outputs, calls));
  add('guards', writeGroups(f.guards, at.board, at.guards, calls));
  for (const n of derivativeNames) {
    const d = f.derivatives[n];
    const chain = at.chains.get(d.chain) as number;
    const which = n === 'A' || n === 'C' ? 'x' : 'w';
    if (d.chain.values.length > 1) {
      add(n, [cleared(chain, d.chain.values.length)]);
      add(n, writeShares(d.chain.shares, which, at.board, chain, chain, calls));
    }
    add(n, [cleared(at.derivatives[n], d.pattern.column.length)]);
    add(n, writeShares(d.shares, which, at.board, at.derivatives[n], chain, calls));
  }
  const exported = new Map<string, number>();
  const order = [...names.values()].flat();
  // In the order in which functions were added, part by part.
  order.forEach((name, i) => {
    exported.set(name, calls.list.length + i);
  });
  const module = new WebAssembly.Module(encodeModule(calls.list, functions, exported));
  return { module, parts: names, calls };
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
  return functionsFor(list, (code, { group: { kernel, entries } }, address) => {
    const args = kernel.args.length;
    const moves = entries[0].targets.length === 2 * kernel.outputs.length;
    evaluate(code, kernel.outputs, address, calls).forEach((value, i) => {
      if (moves) {
        accumulate(code, address(args + 2 * i), value, -1);
        accumulate(code, address(args + 2 * i + 1), value, 1);
        return;
      }
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
    const partials: Expr[] = partialsOf(group.kernel, group.pairs[which]);
    const values = evaluate(code, partials, address, calls);
    let k = group.kernel.args.length;
    const product = code.spare(topological(partials).length);
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
