import type { Loop } from './loops.ts';
import type { Change, Scenario } from './scenario.ts';

/** What can be changed about a loop itself. */
const OWN = ['set point', 'mode', 'output', 'low', 'high'] as const;
export type OwnQuantity = (typeof OWN)[number];

/** Whether a change is about a loop itself: no input of the plant then, but what the loop is told. */
export const isLoopChange = (loops: readonly { readonly name: string }[] = [], c: Change): boolean =>
  loops.some((l) => OWN.some((what) => c.quantity === `${l.name}.${what}`));

/** Changes of one thing about a loop. */
export const changesOf = (l: Loop, what: OwnQuantity): readonly Change[] =>
  l.changes.filter((c) => c.quantity === `${l.name}.${what}`);

/** All that a scenario changes, about the plant and about its loops. */
export function statedChanges(s: Scenario): readonly Change[] {
  const loops = s.loops ?? [];
  return [...s.upsets, ...loops.flatMap((l) => l.changes.filter((c) => isLoopChange([l], c)))];
}

/** The scenario with other changes: those of the plant become its upsets, each loop gets what concerns it. */
export function withChanges(s: Scenario, changes: readonly Change[]): Scenario {
  const upsets = changes.filter((c) => !isLoopChange(s.loops, c));
  return s.loops ? { ...s, upsets, loops: loopsUnder(s.loops, changes) } : { ...s, upsets };
}

/** Each loop with the changes about it, and about the flow that it moves. */
export const loopsUnder = (loops: readonly Loop[], changes: readonly Change[]): Loop[] =>
  loops.map((l) => ({
    ...l,
    changes: changes.filter((c) => isLoopChange([l], c) || movesItsFlow(l, c)),
  }));

const movesItsFlow = (l: Loop, c: Change): boolean =>
  l.move.kind !== 'set point' && c.quantity === l.move.quantity;

/** The operator puts the loop in automatic or in manual; what ends gives back the other mode. */
export function modesOf(l: Loop): { at: number; auto: boolean; words: string }[] {
  return changesOf(l, 'mode').flatMap((c) => {
    const auto = 'to' in c.how && c.how.to === 1;
    const back = c.lasts === null ? [] : [{ at: c.at + c.lasts, auto: !auto, words: `${l.name} back` }];
    return [{ at: c.at, auto, words: c.words }, ...back];
  });
}

/** While a change is in force of the flow that a loop moves, the loop is in manual and its station out of service. */
export function outOfService(l: Loop): { from: number; to: number | null; words: string }[] {
  return l.changes
    .filter((c) => movesItsFlow(l, c))
    .map((c) => ({
      from: c.at,
      to: c.lasts === null ? null : c.at + c.lasts + c.over,
      words: l.controller.auto ? `${l.name} in manual` : `${l.name} out of service`,
    }));
}
