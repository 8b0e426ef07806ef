import type { SampledLoop } from '../../control/loop.ts';
import type { Plant } from '../../plant/assemble.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import { type Event, integrate, type Watcher } from '../../solve/integrate.ts';
import type { Stop } from '../../solve/outcome.ts';
import type { F } from '../../solve/system.ts';
import { type ControlledPlant, controlled, devicesOf, resumedDevices } from '../control/joined.ts';
import { restUnderLoops } from '../control/rest.ts';
import { outputsAt } from '../records.ts';
import { begin, optionsOf, type RunSettings, startModes } from '../run.ts';
import { ApproachWatch, changeOf, limitLine, PERCENTS, watchedLine } from './approach.ts';
import { inputsAfter, movesEnd, movesSchedule } from './moves.ts';
import { type NoRest, type Rest, repels, restFrom, slowest } from './rest.ts';
import { type Watched, watched } from './watched.ts';

/** A start-up followed until all that is judged has come to rest, or can be seen not to. */
export interface Followed {
  readonly plant: Plant;
  readonly quantities: readonly Watched[];
  /** Lines of the quantities, then those of the limits. */
  readonly approach: ApproachWatch;
  /** Outputs at the start. */
  readonly start: F;
  /** By quantity: the change that its bands are parts of; null where it hardly moves. */
  readonly changes: readonly (number | null)[];
  readonly rest: Rest | NoRest;
  /** Whether all quantities have come within 1 % of their change for good. */
  readonly settled: boolean;
  /** s that were run, and s that the scenario asked for. */
  readonly ran: number;
  readonly asked: number;
  readonly events: readonly Event[];
  readonly stop: Stop;
  readonly steps: number;
}

export interface FollowSettings extends Pick<RunSettings, 'integrator' | 'tolerance'> {
  /** s to run at least; the scenario's horizon by default. */
  readonly atLeast?: number;
  readonly repeatability: number | null;
  /** Modes wanted of the linearisation. */
  readonly modes: number;
  /** Change by path that the bands are parts of; that of this very start by default. */
  readonly changes?: ReadonlyMap<string, number | null>;
  /** Only outlets and tanks are judged: enough for a time to steady state. */
  readonly outletsOnly?: boolean;
  /** Others that follow each attempt from its start. */
  readonly watchers?: (plant: Plant) => readonly Watcher[];
}

/** Slowest decays after the last excursion after which nothing comes back: e⁻³ of one per cent is left. */
const AFTER = 3;
/** Slowest decays beyond the scenario's horizon after which it is given up. */
const MOST_DECAYS = 60;
/** Times that a plant may turn out to go for another rest than was thought. */
const ATTEMPTS = 4;
/** One and the same event more often than that is a cycle. */
const REPEATS = 30;
/** Two rests are one where no judged quantity differs by more than this share of its change. */
const SAME = 2e-3;

/**
 * Follows the start-up of a scenario; its upsets are the moves that belong to the start. The final values come from the
 * steady solver. Where the plant turns out on the way to go for another rest (a mixer has inverted, a pump has stopped,
 * a closed loop holds less), it is followed once more against that one. The run goes on beyond the scenario's horizon
 * until three of the slowest decays have passed after the last time anything was out of its 1 % band.
 *
 * @throws Incomplete where a steady start was asked for and none was found; Refusal as `assemble`.
 */
export function follow(s: Scenario, settings: FollowSettings): Followed {
  const made = controlled(s);
  const { plant, initial, atRest } = begin(made);
  const joined: ControlledPlant = { ...made, plant };
  const modes = startModes(plant).modes ?? new Map<number, number>();
  const quantities = watched(plant).filter(
    (q) => !settings.outletsOnly || q.kind === 'outlet' || q.kind === 'tank',
  );
  const after = movesEnd(s.upsets);
  const from = inputsAfter(plant, s.upsets);
  for (const [i, v] of modes) from[i] = v;
  let rest = restUnder(joined, inTheEnd(joined), from, initial, Math.max(0, after), settings.modes);
  // Beyond the last corner of the moves: at the corner itself the inputs are still those before it.
  const asked = Math.max(settings.atLeast ?? s.horizon, after > 0 ? after + 1 : 0);
  for (let attempt = 1; ; attempt++) {
    const made = new Attempt(joined, atRest, quantities, rest, initial, modes, settings);
    // Nearer to rest each time: what it goes for is then the clearer.
    const next = made.run(asked * 2 ** (attempt - 1), after, attempt < ATTEMPTS);
    if (next === null) return { ...made.result(), asked: s.horizon };
    rest = next;
  }
}

/** A loop as it will stand when all that it is told has been done. */
type Standing = Pick<SampledLoop, 'name' | 'automatic'>;

/** Modes that the loops are told last; as they start where they are told none. */
const inTheEnd = (c: ControlledPlant): Standing[] =>
  c.loops.map(({ spec }) => ({ name: spec.name, automatic: spec.modes.at(-1)?.auto ?? spec.auto }));

/** The rest that belongs to a state, loops in automatic at their set points or where a limit of theirs keeps them. */
function restUnder(
  c: ControlledPlant,
  loops: readonly Standing[],
  w: F,
  x: F,
  time: number,
  modes: number,
): Rest | NoRest {
  const led = restUnderLoops(c, loops, { inputs: w, state: x, time });
  if (led === null) return { reason: 'the loops come to no rest' };
  const rest = restFrom(c.plant, x, led.inputs, time, modes);
  return 'state' in rest ? { ...rest, loops: led.loops } : rest;
}

class Attempt {
  readonly #joined: ControlledPlant;
  #devices: readonly SampledLoop[];
  readonly #plant: Plant;
  readonly #quantities: readonly Watched[];
  #rest: Rest | NoRest;
  /** It has gone for another rest than its bands are around. */
  #astray = false;
  readonly #settings: FollowSettings;
  readonly #approach: ApproachWatch;
  readonly #start: F;
  readonly #changes: readonly (number | null)[];
  readonly #others: readonly Watcher[];
  readonly #events: Event[] = [];
  #x: F;
  #w: F;
  #modes: ReadonlyMap<number, number>;
  #time = 0;
  #stop: Stop = { reason: 'reached-end', time: 0 };
  #steps = 0;

  constructor(
    joined: ControlledPlant,
    atRest: boolean,
    quantities: readonly Watched[],
    rest: Rest | NoRest,
    initial: F,
    modes: ReadonlyMap<number, number>,
    settings: FollowSettings,
  ) {
    const { plant } = joined;
    this.#joined = joined;
    this.#devices = devicesOf(joined, atRest);
    this.#plant = plant;
    this.#quantities = quantities;
    this.#rest = rest;
    this.#settings = settings;
    this.#x = initial;
    this.#w = Float64Array.from(plant.inputs);
    for (const [i, v] of modes) this.#w[i] = v;
    this.#modes = modes;
    this.#others = settings.watchers?.(plant) ?? [];
    const start = outputsAt(plant, initial, this.#w);
    this.#start = start;
    const final = 'state' in rest ? rest.outputs : null;
    this.#changes = quantities.map((q) => this.#change(q, final));
    this.#approach = new ApproachWatch(plant, [
      ...quantities.map((q, k) => watchedLine(q, start, final, this.#changes[k], settings.repeatability)),
      ...plant.scenario.limits.map((l) => limitLine(plant, l, start)),
    ]);
  }

  /** Runs until all is at rest, or to the most that makes sense. Returns another rest that it goes for, or null. */
  run(asked: number, after: number, mayTurn: boolean): Rest | NoRest | null {
    for (let to = asked; ; ) {
      this.#runTo(to);
      if (this.#stop.reason !== 'reached-end') return null;
      const check = this.#restNow(0);
      const elsewhere = this.#differs(check);
      const cycles = this.#cycles();
      if (elsewhere && mayTurn && !cycles) return this.#restNow(this.#settings.modes);
      if (elsewhere) {
        // It turns again and again: what it goes for now is said, and that it does not settle.
        this.#rest = this.#restNow(this.#settings.modes);
        this.#astray = true;
      }
      if (elsewhere || cycles) return null;
      if (!('state' in this.#rest) || repels(this.#rest)) return null;
      const slow = slowest(this.#rest);
      const needed = Math.max(this.#lastOutside() + AFTER * slow, this.#lastUnrepeatable());
      const most = Math.max(asked, after + MOST_DECAYS * slow);
      if (needed <= this.#time || this.#time >= most) return null;
      to = Math.min(most, Math.max(1.5 * this.#time, Number.isFinite(needed) ? needed : 0));
    }
  }

  result(): Omit<Followed, 'asked'> {
    const rested = this.#stop.reason === 'reached-end' && 'state' in this.#rest && !repels(this.#rest);
    return {
      plant: this.#plant,
      quantities: this.#quantities,
      approach: this.#approach,
      start: this.#start,
      changes: this.#changes,
      rest: this.#rest,
      settled: rested && !this.#astray && Number.isFinite(this.#lastOutside()),
      ran: this.#time,
      events: this.#events,
      stop: this.#stop,
      steps: this.#steps,
    };
  }

  #runTo(to: number): void {
    const { system, parameters, scenario } = this.#plant;
    const keep: Watcher = {
      end: (_, __, w, inputs) => {
        this.#w = Float64Array.from(w);
        this.#modes = new Map(inputs.modes);
      },
    };
    const run = integrate(
      {
        system,
        parameters,
        schedule: movesSchedule(this.#plant, scenario.upsets, this.#time, to),
        initial: this.#x,
        modes: this.#modes,
        devices: this.#devices,
      },
      optionsOf(this.#settings),
      [this.#approach, keep, ...this.#others],
    );
    this.#x = run.state;
    this.#time = run.time;
    this.#devices = resumedDevices(this.#joined, this.#devices, run.time);
    this.#stop = run.stop;
    this.#steps += run.work.steps;
    this.#events.push(...run.events);
  }

  #restNow(modes: number): Rest | NoRest {
    return restUnder(this.#joined, this.#devices, this.#w, this.#x, this.#time, modes);
  }

  /** Whether something keeps happening again and again, such as a pump that runs its tank dry. */
  #cycles(): boolean {
    const times = new Map<string, number>();
    for (const e of this.#events) times.set(e.name, (times.get(e.name) ?? 0) + 1);
    return Math.max(0, ...times.values()) > REPEATS;
  }

  /** The latest time at which any quantity was out of its band of 1 % of the change. */
  #lastOutside(): number {
    const band = PERCENTS.indexOf(1);
    return this.#quantities.reduce((t, _, k) => Math.max(t, this.#approach.last[k][band] ?? 0), 0);
  }

  /** The latest time at which an outlet or tank still drifted by more than the repeatability of its assay. */
  #lastUnrepeatable(): number {
    const { repeatability } = this.#settings;
    if (repeatability === null) return 0;
    return this.#quantities.reduce((t, q, k) => {
      const { final, bands } = this.#approach.lines[k];
      const assayed = (q.kind === 'outlet' || q.kind === 'tank') && this.#changes[k] !== null;
      // No assay finds what lies in the digits of the run.
      const seen = repeatability * Math.abs(final ?? 0) > 1e-4 * this.#plant.system.outputs[q.output].scale;
      return assayed && seen ? Math.max(t, this.#approach.last[k][bands.length - 1]) : t;
    }, 0);
  }

  #change(q: Watched, final: F | null): number | null {
    const given = this.#settings.changes?.get(q.path);
    if (given !== undefined || final === null) return given ?? null;
    return changeOf(this.#start[q.output], final[q.output], this.#plant.system.outputs[q.output].scale);
  }

  #differs(next: Rest | NoRest): boolean {
    const own = this.#rest;
    if (!('state' in own) || !('state' in next)) return 'state' in own !== 'state' in next;
    return this.#quantities.some((q) => {
      const [a, b] = [own.outputs[q.output], next.outputs[q.output]];
      const { scale } = this.#plant.system.outputs[q.output];
      // What hardly moves is not judged, as long as it goes on hardly to move.
      const change = changeOf(this.#start[q.output], b, scale) ?? Math.abs(b);
      return Math.abs(a - b) > SAME * change + 1e-6 * scale;
    });
  }
}
