import type { Plant } from '../../plant/assemble.ts';
import type { JoinedLoop } from './joined.ts';

/** Output that shows a flow which can be set: a feed's own, of a tank the stream that it pumps; −1: none. */
export function flowOutput({ system, scenario: s }: Plant, quantity: string): number {
  const tank = s.tanks.find((t) => `${t.name}.flow` === quantity);
  const path = tank ? `${tank.to}.flow` : quantity;
  return system.outputs.findIndex((o) => o.path === path);
}

/** Flows that loops set in some run, by quantity, with the output that shows them. */
export const movedFlows = (
  plant: Plant,
  loops: readonly JoinedLoop[],
): { readonly loop: string; readonly quantity: string; readonly output: number }[] =>
  loops.flatMap(({ loop: l, awake }) => {
    if (!awake || l.move.kind === 'set point') return [];
    const output = flowOutput(plant, l.move.quantity);
    return output < 0 ? [] : [{ loop: l.name, quantity: l.move.quantity, output }];
  });
