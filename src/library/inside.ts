import { hint } from '../scenario/nearest.ts';
import type { ReadScenario, ScenarioError } from '../scenario/read.ts';
import { Refusal } from '../scenario/refusal.ts';
import { Incomplete } from '../study/run.ts';
import { NotCompleted } from './errors.ts';
import type { Quantity } from './types.ts';

interface Inside extends ReadScenario {
  refused(e: ScenarioError): Error;
}

/** What a scenario of the library is inside; kept out of its type, so that the type is plain. */
export const shared = new WeakMap<object, Inside>();

/** Works on the checked scenario; what the plant refuses, or cannot compute, becomes an error of the library. */
export function working<T>(scenario: object, work: (s: ReadScenario['scenario']) => T): T {
  const inside = shared.get(scenario);
  if (!inside) throw new TypeError('expected a scenario from readScenario or readScenarioFile');
  try {
    return work(inside.scenario);
  } catch (e) {
    if (e instanceof Refusal) throw inside.refused(inside.refuse(e));
    throw e instanceof Incomplete ? new NotCompleted(e.message) : e;
  }
}

/** Looks up outputs by their path. */
export function finder(outputs: readonly Quantity[]): (path: string) => number {
  const at = new Map(outputs.map((o, i) => [o.path, i]));
  return (path) => {
    const i = at.get(path);
    if (i === undefined) throw new RangeError(`no quantity '${path}'${hint(path, [...at.keys()])}`);
    return i;
  };
}

export const plain = (outputs: readonly Quantity[]): Quantity[] =>
  outputs.map(({ path, unit }) => ({ path, unit }));
