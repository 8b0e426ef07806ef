import type { F } from '../solve/system.ts';
import type { Group } from './groups.ts';
import type { Formulas, Machine } from './machine.ts';

/** The formulas of a plant carried out group by group from lists of references: the oracle of the generated code. */
export function listed(f: Formulas): Machine {
  const board = new Float64Array(f.board);
  const change = new Float64Array(f.places + 1);
  const outputs = new Float64Array(f.outputCount);
  const guards = new Float64Array(f.guardCount);
  return {
    board,
    change: change.subarray(0, f.places),
    outputs,
    guards,
    run(part) {
      switch (part) {
        case 'still':
          return runAll(f.still, board, board);
        case 'moving':
          return runAll(f.moving, board, board);
        case 'fluxes':
          change.fill(0);
          return runAll(f.fluxes, board, change);
        case 'outputs':
          return runAll(f.outputs, board, outputs);
        case 'guards':
          return runAll(f.guards, board, guards);
      }
    },
    derive: (name, values) => f.derivative(name).evaluate(board, values),
  };
}

function runAll(groups: readonly Group[], board: F, target: F): void {
  for (const g of groups) g.run(g.entries.length, g.references, board, target);
}
