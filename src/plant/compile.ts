import { createHash } from 'node:crypto';
import type { Execution } from '../math/kernel.ts';
import type { F, System } from '../solve/system.ts';
import { Derivative, SignalChain } from './derivative.ts';
import { group, signalActivity, signalLevel } from './groups.ts';
import type { Ledger, Ref } from './ledger.ts';
import { listed } from './listed.ts';
import { type Formulas, machineOf } from './machine.ts';

/**
 * Ledger → System. All values stand on one board, [x | w | p | z]; a call copies its arguments there, lets the
 * signals settle, and runs the groups: as one piece of machine code for the whole plant or, where an `execution` is
 * given, group by group. One slot past the end of dx takes what leaves for nowhere.
 */
export function compile(ledger: Ledger, execution: Execution | null): System {
  const nx = ledger.places.length;
  const nw = ledger.inputs.length;
  const np = ledger.parameters.length;
  const start = { x: 0, w: nx, p: nx + nw, z: nx + nw + np };
  const address = (r: Ref): number => start[r.space] + r.index;
  const activity = signalActivity(ledger);
  const level = signalLevel(ledger);
  const at = (target: (i: number) => number) => ({ address, target });

  const signals = group(
    ledger.signals,
    'assign',
    execution,
    activity,
    at((i) => start.z + i),
    (e) => level[e.targets[0]],
  );
  const fluxes = group(
    ledger.fluxes,
    'move',
    execution,
    activity,
    at((i) => (i < 0 ? nx : i)),
  );
  const outputs = group(
    ledger.outputEntries,
    'assign',
    execution,
    activity,
    at((i) => i),
  );
  const guards = group(
    ledger.guardEntries,
    'assign',
    execution,
    activity,
    at((i) => i),
  );

  const chainX = new SignalChain(signals, ledger.signalCount, 'x');
  const chainW = new SignalChain(signals, ledger.signalCount, 'w');
  const A = new Derivative(fluxes, nx, 'x', chainX);
  const B = new Derivative(fluxes, nx, 'w', chainW);
  const C = new Derivative(outputs, ledger.outputs.length, 'x', chainX);
  const D = new Derivative(outputs, ledger.outputs.length, 'w', chainW);

  // Signals that no state enters change only when an input or a parameter does: between corners, hardly ever.
  const formulas: Formulas = {
    board: start.z + ledger.signalCount,
    places: nx,
    still: signals.filter((g) => g.activity.every((a) => !a.x)),
    moving: signals.filter((g) => g.activity.some((a) => a.x)),
    fluxes,
    outputs,
    guards,
    outputCount: ledger.outputs.length,
    guardCount: ledger.guards.length,
    derivatives: { A, B, C, D },
  };
  const texts = entryTexts(ledger);
  const machine = execution === null ? machineOf(formulas, structure(ledger, texts)) : listed(formulas);
  const { board } = machine;
  board.fill(Number.NaN);
  // Parameters are constant in a run: one and the same array holds the same numbers.
  let known: F | null = null;
  const settle = (x: F, w: F, p: F): void => {
    board.set(x, 0);
    if (p !== known || !equals(board, start.w, w)) {
      board.set(w, start.w);
      board.set(p, start.p);
      known = p;
      machine.run('still');
    }
    machine.run('moving');
  };

  return {
    topology: hash(ledger, texts),
    places: ledger.places,
    inputs: ledger.inputs,
    parameters: ledger.parameters,
    outputs: ledger.outputs,
    guards: ledger.guards,
    steady: ledger.steady,
    ...(machine.native ? { native: machine.native } : {}),
    conserved: ledger.conserved.map(({ name, places }) => {
      const weights = new Float64Array(nx);
      for (const i of places) weights[i] = 1;
      return { name, weights };
    }),
    A: A.pattern,
    B: B.pattern,
    C: C.pattern,
    D: D.pattern,
    rhs(x, w, p, dx) {
      settle(x, w, p);
      machine.run('fluxes');
      dx.set(machine.change);
    },
    jacobian(x, w, p, values) {
      settle(x, w, p);
      machine.run('A');
      values.set(machine.derivatives.A);
    },
    byInput(x, w, p, values) {
      settle(x, w, p);
      machine.run('B');
      values.set(machine.derivatives.B);
    },
    output(x, w, p, y) {
      settle(x, w, p);
      machine.run('outputs');
      y.set(machine.outputs);
    },
    byOutput(x, w, p, c, d) {
      settle(x, w, p);
      machine.run('C');
      c.set(machine.derivatives.C);
      machine.run('D');
      d.set(machine.derivatives.D);
    },
    guard(x, w, p, g) {
      settle(x, w, p);
      machine.run('guards');
      g.set(machine.guards);
    },
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
