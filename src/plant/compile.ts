import { createHash } from 'node:crypto';
import type { Effect, Execution } from '../math/kernel.ts';
import type { F, Pattern, System } from '../solve/system.ts';
import { Derivative, SignalChain } from './derivative.ts';
import { type Group, group, signalActivity, signalLevel } from './groups.ts';
import type { Entry, Ledger, Ref } from './ledger.ts';
import { listed } from './listed.ts';
import { Blueprint, type DerivativeName, type Formulas, type Machine } from './machine.ts';

/** Blueprints of the structures seen last: the samples of an ensemble, and plants at other numbers, share one. */
const known = new Map<string, Blueprint>();
const MOST_KNOWN = 32;

/**
 * Ledger → System. All values stand on one board, [x | w | p | z]; a call copies its arguments there, lets the
 * signals settle, and runs the groups: as machine code for the whole plant or, where an `execution` is given, group by
 * group. One slot past the end of dx takes what leaves for nowhere.
 */
export function compile(ledger: Ledger, execution: Execution | null): System {
  const nx = ledger.places.length;
  const nw = ledger.inputs.length;
  const texts = entryTexts(ledger);
  // Who only asks what there is needs no code.
  const prepared = once(() => prepare(ledger, texts, execution));
  const running = once(() => prepared().machine());
  const pattern = (name: DerivativeName): Pattern => prepared().pattern(name);
  const start = { w: nx, p: nx + nw };
  // Parameters are constant in a run: one and the same array holds the same numbers.
  let last: F | null = null;
  const settled = (x: F, w: F, p: F): Machine => {
    const machine = running();
    const { board } = machine;
    if (last === null) board.fill(Number.NaN);
    board.set(x, 0);
    if (p !== last || !equals(board, start.w, w)) {
      board.set(w, start.w);
      board.set(p, start.p);
      last = p;
      machine.run('still');
    }
    machine.run('moving');
    return machine;
  };

  return {
    topology: hash(ledger, texts),
    places: ledger.places,
    inputs: ledger.inputs,
    parameters: ledger.parameters,
    outputs: ledger.outputs,
    guards: ledger.guards,
    steady: ledger.steady,
    get native() {
      return running().native;
    },
    conserved: ledger.conserved.map(({ name, places }) => {
      const weights = new Float64Array(nx);
      for (const i of places) weights[i] = 1;
      return { name, weights };
    }),
    get A() {
      return pattern('A');
    },
    get B() {
      return pattern('B');
    },
    get C() {
      return pattern('C');
    },
    get D() {
      return pattern('D');
    },
    rhs(x, w, p, dx) {
      const machine = settled(x, w, p);
      machine.run('fluxes');
      dx.set(machine.change);
    },
    jacobian(x, w, p, values) {
      settled(x, w, p).derive('A', values);
    },
    byInput(x, w, p, values) {
      settled(x, w, p).derive('B', values);
    },
    output(x, w, p, y) {
      const machine = settled(x, w, p);
      machine.run('outputs');
      y.set(machine.outputs);
    },
    byOutput(x, w, p, c, d) {
      const machine = settled(x, w, p);
      machine.derive('C', c);
      machine.derive('D', d);
    },
    guard(x, w, p, g) {
      const machine = settled(x, w, p);
      machine.run('guards');
      g.set(machine.guards);
    },
  };
}

/** How the formulas of a ledger will be carried out. */
interface Prepared {
  machine(): Machine;
  pattern(name: DerivativeName): Pattern;
}

function prepare(
  ledger: Ledger,
  texts: readonly (readonly string[])[],
  execution: Execution | null,
): Prepared {
  if (execution !== null) {
    const formulas = formulasOf(ledger, execution);
    return { machine: () => listed(formulas), pattern: (name) => formulas.derivative(name).pattern };
  }
  const key = structure(ledger, texts);
  const blueprint = known.get(key) ?? new Blueprint(formulasOf(ledger, null));
  known.delete(key);
  known.set(key, blueprint);
  if (known.size > MOST_KNOWN) known.delete(known.keys().next().value as string);
  return blueprint;
}

/** The entries of a ledger in groups, on the board. */
function formulasOf(ledger: Ledger, execution: Execution | null): Formulas {
  const nx = ledger.places.length;
  const start = {
    x: 0,
    w: nx,
    p: nx + ledger.inputs.length,
    z: nx + ledger.inputs.length + ledger.parameters.length,
  };
  const address = (r: Ref): number => start[r.space] + r.index;
  const activity = signalActivity(ledger);
  const level = signalLevel(ledger);
  const made = (
    entries: readonly Entry[],
    effect: Effect,
    target: (i: number) => number,
    levelOf?: (e: Entry) => number,
  ): Group[] => group(entries, effect, execution, activity, { address, target }, levelOf);
  const signals = made(
    ledger.signals,
    'assign',
    (i) => start.z + i,
    (e) => level[e.targets[0]],
  );
  const fluxes = made(ledger.fluxes, 'move', (i) => (i < 0 ? nx : i));
  const outputs = made(ledger.outputEntries, 'assign', (i) => i);
  const chains = {
    x: once(() => new SignalChain(signals, ledger.signalCount, 'x')),
    w: once(() => new SignalChain(signals, ledger.signalCount, 'w')),
  };
  const derivatives = {
    A: once(() => new Derivative(fluxes, nx, 'x', chains.x())),
    B: once(() => new Derivative(fluxes, nx, 'w', chains.w())),
    C: once(() => new Derivative(outputs, ledger.outputs.length, 'x', chains.x())),
    D: once(() => new Derivative(outputs, ledger.outputs.length, 'w', chains.w())),
  };
  // Signals that no state enters change only when an input or a parameter does: between corners, hardly ever.
  return {
    board: start.z + ledger.signalCount,
    places: nx,
    still: signals.filter((g) => g.activity.every((a) => !a.x)),
    moving: signals.filter((g) => g.activity.some((a) => a.x)),
    fluxes,
    outputs,
    guards: made(ledger.guardEntries, 'assign', (i) => i),
    outputCount: ledger.outputs.length,
    guardCount: ledger.guards.length,
    derivative: (name) => derivatives[name](),
  };
}

/** Works something out when it is first asked for. */
function once<T extends object>(make: () => T): () => T {
  let made: T | null = null;
  return () => {
    made ??= make();
    return made;
  };
}

function equals(board: F, from: number, values: F): boolean {
  for (let i = 0; i < values.length; i++) if (board[from + i] !== values[i]) return false;
  return true;
}

const entriesOf = (ledger: Ledger) => [
  ledger.signals,
  ledger.fluxes,
  ledger.outputEntries,
  ledger.guardEntries,
];

/** By list: what each entry reads and writes. */
const entryTexts = (ledger: Ledger): string[][] =>
  entriesOf(ledger).map((list) => list.map((e) => `(${e.args.map((r) => r.space + r.index)})>${e.targets}`));

/** Structure only: which places, inputs, parameters and outputs there are, and which fluxes join them. */
function hash(ledger: Ledger, texts: readonly (readonly string[])[]): string {
  const text = [
    ...[ledger.places, ledger.inputs, ledger.parameters, ledger.outputs].map((l) =>
      l.map((q) => q.path).join('|'),
    ),
    ...entriesOf(ledger).map((list, k) => list.map((e, i) => e.kernel.name + texts[k][i]).join('|')),
  ].join('\n');
  return digest(text);
}

/** All that the code of a plant depends on: formulas by their identity, and what they read and write. */
function structure(ledger: Ledger, texts: readonly (readonly string[])[]): string {
  const sizes = [ledger.places, ledger.inputs, ledger.parameters, ledger.outputs, ledger.guards];
  return digest(
    [
      sizes.map((l) => l.length).join(),
      ...entriesOf(ledger).map((list, k) =>
        list.map((e, i) => e.kernel.outputs.map((o) => o.id) + texts[k][i]).join('|'),
      ),
    ].join('\n'),
  );
}

const digest = (text: string): string => createHash('sha256').update(text).digest('hex').slice(0, 16);
