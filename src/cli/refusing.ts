import type { ReadScenario } from '../scenario/read.ts';
import { Refusal } from '../scenario/refusal.ts';
import { Incomplete } from '../study/run.ts';
import { exits, Known } from './exit.ts';

/** Runs something on a scenario; a refusal by the plant becomes lines of the scenario file. */
export function refusing<T>(read: ReadScenario, work: () => T): T {
  try {
    return work();
  } catch (e) {
    throw known(read, e);
  }
}

/** A plant's refusal or a computation that came to nothing, as the user is told of it; other errors as they are. */
export function known(read: ReadScenario, e: unknown): unknown {
  if (e instanceof Refusal) return new Known(read.refuse(e).message, exits.refused);
  if (e instanceof Incomplete) return new Known(e.message, exits.incomplete);
  return e;
}
