import { createHash } from 'node:crypto';
import type { Execution } from '../math/kernel.ts';
import type { F, System } from '../solve/system.ts';
import { Derivative, SignalChain } from './derivative.ts';
import { type Group, group, signalActivity, signalLevel } from './groups.ts';
import type { Ledger, Ref } from './ledger.ts';

/**
 * Ledger → System. All values stand on one board, [x | w | p | z]; a call copies its arguments there, lets the
 * signals settle, and runs the groups. One slot past the end of dx takes what leaves for nowhere.
 */
export function compile(ledger: Ledger, execution: Execution): System {
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

  const board = new Float64Array(start.z + ledger.signalCount);
  const change = new Float64Array(nx + 1);
  const changeOfPlaces = change.subarray(0, nx);
  // Signals that no state enters change only when an input or a parameter does: between corners, hardly ever.
  const still = signals.filter((g) => g.activity.every((a) => !a.x));
  const moving = signals.filter((g) => g.activity.some((a) => a.x));
  board.fill(Number.NaN);
  const settle = (x: F, w: F, p: F): void => {
    board.set(x, 0);
    if (!(equals(board, start.w, w) && equals(board, start.p, p))) {
      board.set(w, start.w);
      board.set(p, start.p);
      runAll(still, board, board);
    }
    runAll(moving, board, board);
  };

  return {
    topology: hash(ledger),
    places: ledger.places,
    inputs: ledger.inputs,
    parameters: ledger.parameters,
    outputs: ledger.outputs,
    guards: ledger.guards,
    steady: ledger.steady,
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
      change.fill(0);
      runAll(fluxes, board, change);
      dx.set(changeOfPlaces);
    },
    jacobian(x, w, p, values) {
      settle(x, w, p);
      A.evaluate(board, values);
    },
    byInput(x, w, p, values) {
      settle(x, w, p);
      B.evaluate(board, values);
    },
    output(x, w, p, y) {
      settle(x, w, p);
      runAll(outputs, board, y);
    },
    byOutput(x, w, p, c, d) {
      settle(x, w, p);
      C.evaluate(board, c);
      D.evaluate(board, d);
    },
    guard(x, w, p, g) {
      settle(x, w, p);
      runAll(guards, board, g);
    },
  };
}

function equals(board: F, from: number, values: F): boolean {
  for (let i = 0; i < values.length; i++) if (board[from + i] !== values[i]) return false;
  return true;
}

function runAll(groups: readonly Group[], board: F, target: F): void {
  for (let i = 0; i < groups.length; i++) {
    const g = groups[i];
    g.run(g.entries.length, g.references, board, target);
  }
}

/** Structure only: which places, inputs, parameters and outputs there are, and which fluxes join them. */
function hash(ledger: Ledger): string {
  const entry = (e: { kernel: { name: string }; args: readonly Ref[]; targets: readonly number[] }): string =>
    `${e.kernel.name}(${e.args.map((r) => r.space + r.index)})>${e.targets}`;
  const text = [
    ...[ledger.places, ledger.inputs, ledger.parameters, ledger.outputs].map((l) =>
      l.map((q) => q.path).join('|'),
    ),
    ...[ledger.signals, ledger.fluxes, ledger.outputEntries, ledger.guardEntries].map((l) =>
      l.map(entry).join('|'),
    ),
  ].join('\n');
  return createHash('sha256').update(text).digest('hex').slice(0, 16);
}
