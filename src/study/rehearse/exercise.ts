import type { Change, Scenario } from '../../scenario/scenario.ts';
import type { Watcher } from '../../solve/integrate.ts';
import { movedFlows } from '../control/moved.ts';
import { outputsAt } from '../records.ts';
import { usual } from '../run.ts';
import type { RunFigures } from './figures.ts';
import {
  devicesUnder,
  type Ground,
  ground,
  inputsAt,
  integrateFrom,
  keptDevices,
  type Standing,
} from './ground.ts';
import { plan } from './plan.ts';
import type { RehearseResult } from './rehearse.ts';

/** What an engineer at the controls sees. */
export interface View {
  /** s of the run. */
  readonly time: number;
  readonly sinceUpset: number;
  readonly shown: readonly {
    readonly path: string;
    readonly value: number;
    readonly unit: string;
    readonly limit: { readonly side: 'below' | 'above'; readonly value: number } | null;
  }[];
  /** Events since the last view. */
  readonly events: readonly { readonly time: number; readonly message: string }[];
}

/** s before the upset at which an exercise begins, where the run has as many. */
const BEFORE = 600;

/**
 * A plant in simulated time under the upsets of a scenario and the moves of one of its answers, as far as it has been
 * driven. A new move makes a new plant, run again up to now, so that what is seen is what a rehearsal of it gives.
 */
export class Exercise {
  readonly ground: Ground;
  readonly #changes: readonly Change[];
  #now: Standing;
  #events: { time: number; message: string }[] = [];

  /** `answer`: the name of the one that holds the moves; none has been made where there is no such answer. */
  constructor(scenario: Scenario, answer: string) {
    const first = Math.min(...scenario.upsets.map((u) => u.at));
    const own = scenario.rehearsing?.answers.find((a) => a.name === answer);
    const rehearsing = scenario.rehearsing && { ...scenario.rehearsing, answers: own ? [own] : [] };
    this.ground = ground({ ...scenario, rehearsing }, usual, { from: Math.max(0, first - BEFORE) });
    const g = this.ground;
    const moves = own ? plan(own, g.upsets, g.horizon, () => null).moves : [];
    this.#changes = [...g.background, ...g.changes, ...moves];
    this.#now = g.before;
  }

  get time(): number {
    return this.#now.time;
  }

  get over(): boolean {
    return this.time >= this.ground.horizon;
  }

  /** Runs on to a time [s], at most to the horizon. */
  advance(to: number): void {
    const end = Math.min(to, this.ground.horizon);
    if (!(end > this.time)) return;
    let modes = this.#now.modes;
    const keep: Watcher = {
      end(_, __, ___, inputs) {
        modes = new Map(inputs.modes);
      },
    };
    const devices = devicesUnder(this.ground, this.#now, this.#changes);
    const run = integrateFrom(this.ground, this.#now, this.#changes, end, usual, [keep], devices);
    this.#events.push(...run.events.map((e) => ({ time: e.time, message: e.message })));
    this.#now = { time: run.time, state: run.state, modes, ...keptDevices(devices, run.time) };
  }

  /** Limited quantities first, then the solutes of the other outlets, then what tanks hold. */
  view(): View {
    const { plant, first } = this.ground;
    const { outputs } = plant.system;
    const y = outputsAt(plant, this.#now.state, inputsAt(this.ground, this.#now, this.#changes));
    const s = plant.scenario;
    const limited = s.limits.map((l) => ({
      path: `${l.stream}.${l.quantity}`,
      limit: { side: l.side, value: l.value },
    }));
    const others = [
      ...plant.network.outlets.flatMap((o) => s.solutes.map((n) => `${o.name}.${n}`)),
      ...s.tanks.flatMap((t) => [`${t.name}.volume`, ...s.solutes.map((n) => `${t.name}.${n}`)]),
      ...movedFlows(plant, this.ground.joined.loops).map((q) => outputs[q.output].path),
      ...(s.loops ?? []).flatMap((l) =>
        ['measurement', 'set point', 'output'].map((what) => `${l.name}.${what}`),
      ),
    ].filter((path) => !limited.some((l) => l.path === path));
    const events = this.#events;
    this.#events = [];
    return {
      time: this.time,
      sinceUpset: this.time - first,
      shown: [...limited, ...others.map((path) => ({ path, limit: null }))].flatMap(({ path, limit }) => {
        const i = outputs.findIndex((o) => o.path === path);
        return i < 0 ? [] : [{ path, value: y[i], unit: outputs[i].unit, limit }];
      }),
      events,
    };
  }
}

/** How an exercise came out against doing nothing and the best named answer. */
export interface Score {
  readonly yours: RunFigures;
  readonly best: { readonly name: string; readonly figures: RunFigures } | null;
  /** What is counted: cost where prices are stated, else kg beyond the limits, else s out of them. */
  readonly by: 'cost' | 'beyond' | 'outside';
  /** Share of what the best answer avoids that was avoided; null where that is no real difference. */
  readonly avoided: number | null;
}

/** Share of what doing nothing costs below which two results are the same. */
const REAL = 0.01;

/** The score of the answer of this name in a rehearsal; null where it is not among them. */
export function scoreOf(r: RehearseResult, name: string): Score | null {
  const own = r.answers.find((a) => a.answer.name === name);
  if (own === undefined) return null;
  const other = r.answers.find((a) => a.answer.name !== name);
  const by = r.nothing.cost !== null ? 'cost' : r.nothing.beyond > 0 ? 'beyond' : 'outside';
  const count = (f: RunFigures): number => f[by] ?? 0;
  const gap = other ? count(r.nothing) - count(other.figures) : 0;
  return {
    yours: own.figures,
    best: other ? { name: other.answer.name, figures: other.figures } : null,
    by,
    avoided: gap > REAL * count(r.nothing) ? (count(r.nothing) - count(own.figures)) / gap : null,
  };
}
