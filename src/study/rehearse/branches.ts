import type { Change } from '../../scenario/scenario.ts';
import type { Event } from '../../solve/integrate.ts';
import { type LimitReport, LimitWatch } from '../limit-watch.ts';
import { Courses } from './course.ts';
import { devicesUnder, type Ground, integrateFrom, type Standing } from './ground.ts';
import { type How, Standings, tried, type Verdict } from './judge.ts';
import { spread } from './scan.ts';
import { WorstWatch } from './worst.ts';

/** Standings kept of a run that others branch off from. */
const KEPT = 160;

/** How a trial is computed: quickly for a scan, or as surely as the runs that are told of. */
export interface Care {
  readonly quick: How;
  readonly sure: How;
}

/**
 * A run that others follow up to some moment: what was integrated of it is not integrated again. Standings come from the
 * careful run, so that a trial differs from it by nothing that happens before the two part.
 */
export class Branches {
  /** s at which it first breaks a limit; Infinity: not at all. */
  readonly breaks: number;
  readonly events: readonly Event[];
  readonly #g: Ground;
  readonly #care: Care;
  readonly #standings: readonly Standing[];
  readonly #whole: { readonly courses: Courses; readonly reports: readonly LimitReport[] };

  constructor(g: Ground, changes: readonly Change[], care: Care, also: readonly number[] = []) {
    this.#g = g;
    this.#care = care;
    const limits = g.scenario.limits.map((l) => new LimitWatch(g.plant, l));
    const all = [...g.background, ...changes];
    const devices = devicesUnder(g, g.before, all);
    const kept = new Standings([...spread(g.before.time, g.horizon, KEPT).slice(1, -1), ...also], devices);
    const limited = g.scenario.limits.map((l) =>
      g.plant.system.outputs.findIndex((o) => o.path === `${l.stream}.${l.quantity}`),
    );
    const courses = new Courses(g.plant, [...new Set(limited)]);
    const watchers = [kept, courses, ...limits];
    const run = integrateFrom(g, g.before, all, g.horizon, care.sure, watchers, devices);
    this.#whole = { courses, reports: limits.map((l) => l.report()) };
    this.#standings = [g.before, ...[...kept.kept.values()].sort((a, b) => a.time - b.time)];
    this.breaks = Math.min(
      Infinity,
      ...limits.flatMap((l) =>
        l
          .report()
          .spells.slice(0, 1)
          .map((q) => q.from),
      ),
    );
    this.events = run.events;
  }

  /**
   * Tries changes that are those of this run until `parts`. A limit broken before that is broken, and by how much more
   * the settings cannot say: the excess then grows with the time by which they come too late.
   */
  tries(changes: readonly Change[], parts: number, depth: 'first' | 'looks' | 'peaks'): Verdict {
    if (this.breaks < parts)
      return { excess: (parts - this.breaks) / (this.#g.horizon - this.#g.before.time), events: [] };
    const how = depth === 'peaks' ? this.#care.sure : this.#care.quick;
    return tried(this.#g, this.#before(parts), changes, how, depth);
  }

  /**
   * Worst value of a limited quantity, and s out of its limit, where changes take over from this run at `parts`: what
   * went before is taken from this run.
   */
  goesOn(changes: readonly Change[], parts: number, limit: number): { worst: number; outside: number } {
    const g = this.#g;
    const from = this.#before(parts);
    const l = g.scenario.limits[limit];
    const watch = new WorstWatch(g.plant, l);
    const all = [...g.background, ...changes];
    integrateFrom(g, from, all, g.horizon, this.#care.quick, [watch]);
    const { worst, outside } = watch;
    const earlier = this.#until(from.time, limit);
    const sign = l.side === 'below' ? 1 : -1;
    const value = sign * worst >= sign * earlier.worst ? worst : earlier.worst;
    return { worst: value, outside: outside + earlier.outside };
  }

  /** The same of this run up to one of its standings. */
  #until(t: number, limit: number): { worst: number; outside: number } {
    const { courses, reports } = this.#whole;
    const { path, spells, limit: l } = reports[limit];
    const output = this.#g.plant.system.outputs.findIndex((o) => o.path === path);
    const sign = l.side === 'below' ? 1 : -1;
    let worst = courses.value(output, courses.from);
    for (const look of courses.looks().filter((q) => q <= t)) {
      const v = courses.value(output, look);
      if (sign * v > sign * worst) worst = v;
    }
    const outside = spells.reduce((sum, q) => sum + Math.max(0, Math.min(t, q.to ?? t) - q.from), 0);
    return { worst, outside };
  }

  #before(t: number): Standing {
    let lo = 0;
    let hi = this.#standings.length - 1;
    while (lo < hi) {
      const mid = (lo + hi + 1) >> 1;
      if (this.#standings[mid].time <= t) lo = mid;
      else hi = mid - 1;
    }
    return this.#standings[lo];
  }
}
