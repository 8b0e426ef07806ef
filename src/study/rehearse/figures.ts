import { track } from '../../plant/course.ts';
import { isLoopChange } from '../../scenario/loop-changes.ts';
import type { Limit } from '../../scenario/scenario.ts';
import type { Event } from '../../solve/integrate.ts';
import { inputsAfter } from '../commission/moves.ts';
import { restFrom } from '../commission/rest.ts';
import { movedFlows } from '../control/moved.ts';
import type { LoopReport } from '../control/report.ts';
import type { Spell } from '../limit-watch.ts';
import type { Courses } from './course.ts';
import type { Ground, Upset } from './ground.ts';
import type { Judged } from './judge.ts';

/** What a limit went through in one run; times in s of the run, from the beginning of the first upset on. */
export interface LimitFigures {
  readonly limit: Limit;
  readonly path: string;
  readonly unit: string;
  readonly kept: boolean;
  /** Over already as the first upset began: then there is no time of break. */
  readonly overBefore: boolean;
  /** First crossing after the first upset began; which upset it belongs to, and s since that one began. */
  readonly breaks: { readonly time: number; readonly upset: number; readonly after: number } | null;
  /** Last return with no crossing after it; null: none, or still over at the end. */
  readonly back: number | null;
  readonly stillOver: boolean;
  readonly spells: readonly Spell[];
  readonly outside: number;
  readonly longest: number;
  readonly worst: { readonly value: number; readonly time: number };
  /** kg beyond the limit, and m³ that left while it was broken; null where that has no meaning. */
  readonly beyond: number | null;
  readonly volume: number | null;
  /** kg that left with the stream more than without the upset; null for what is no concentration of an outlet. */
  readonly more: number | null;
  /** s at which it has come back for good to 2 % of its largest departure; null: not within the run. */
  readonly recovered: number | null;
  /** Whether it goes back to where it was, or to where the inputs now hold it. */
  readonly goesElsewhere: boolean;
}

/** What one run came to. */
export interface RunFigures {
  readonly limits: readonly LimitFigures[];
  readonly kept: boolean;
  readonly outside: number;
  readonly beyond: number;
  /** m³ of organic pumped more than by doing nothing. */
  readonly extraSolvent: number;
  /** In the currency of the prices; null where none are stated. */
  readonly cost: number | null;
  readonly tanks: readonly { readonly tank: string; readonly least: number; readonly most: number }[];
  readonly events: readonly Event[];
  /** What the loops did from just before the first upset on. */
  readonly loops: readonly LoopReport[];
}

/** Share of the largest departure within which a quantity has recovered. */
const RECOVERED = 0.02;

/** Figures of a run against the one without the upset and the one in which nothing is done. */
export function runFigures(g: Ground, run: Judged, quiet: Judged, nothing: Judged): RunFigures {
  const limits = run.limits.map((_, i) => limitFigures(g, i, run, quiet));
  const sum = (pick: (l: LimitFigures) => number): number => limits.reduce((s, l) => s + pick(l), 0);
  const extraSolvent = pumped(g, run) - pumped(g, nothing);
  const outputs = g.plant.system.outputs;
  return {
    limits,
    kept: limits.every((l) => l.kept),
    outside: sum((l) => l.outside),
    beyond: sum((l) => l.beyond ?? 0),
    extraSolvent,
    cost: costOf(g, limits, extraSolvent),
    tanks: g.scenario.tanks.flatMap((t) => {
      const output = outputs.findIndex((o) => o.path === `${t.name}.volume`);
      return run.courses.outputs.includes(output) ? [{ tank: t.name, ...run.courses.extremes(output) }] : [];
    }),
    events: run.events.filter((e) => e.time >= Math.min(g.first, g.before.time)),
    loops: run.loops,
  };
}

function limitFigures(g: Ground, i: number, run: Judged, quiet: Judged): LimitFigures {
  const { limit, path, unit, worst, beyond, volume, ...report } = run.limits[i];
  const spells = report.spells.filter((q) => (q.to ?? g.horizon) > g.first);
  const first = spells[0];
  const overBefore =
    first !== undefined && (first.from < g.first || (report.atStart && first.from <= g.before.time));
  const broken = first !== undefined && !overBefore ? first.from : null;
  const last = spells[spells.length - 1];
  const stillOver = last !== undefined && last.to === null;
  return {
    limit,
    path,
    unit,
    kept: spells.length === 0,
    overBefore,
    breaks: broken === null ? null : { time: broken, ...belongsTo(g.upsets, broken) },
    back: last === undefined || stillOver ? null : last.to,
    stillOver,
    spells,
    outside: spells.reduce((s, q) => s + (q.to ?? g.horizon) - Math.max(q.from, g.before.time), 0),
    longest: Math.max(0, ...spells.map((q) => (q.to ?? g.horizon) - q.from)),
    worst,
    beyond,
    volume,
    more: moreThan(g, limit, run, quiet),
    ...recovery(g, path, run, quiet),
  };
}

/** A break belongs to the upset that began last before it. */
function belongsTo(upsets: readonly Upset[], time: number): { upset: number; after: number } {
  const begun = upsets.filter((u) => u.begins <= time);
  const upset = Math.max(1, begun.length);
  return { upset, after: time - (upsets[upset - 1]?.begins ?? 0) };
}

function moreThan(g: Ground, limit: Limit, run: Judged, quiet: Judged): number | null {
  const at = g.plant.system.places.findIndex((p) => p.path === `${limit.stream}.out.${limit.quantity}`);
  return at < 0 ? null : run.state[at] - quiet.state[at];
}

/** When a quantity has come back: to the run without the upset, or to where the inputs hold it at the end. */
function recovery(
  g: Ground,
  path: string,
  run: Judged,
  quiet: Judged,
): Pick<LimitFigures, 'recovered' | 'goesElsewhere'> {
  const output = g.plant.system.outputs.findIndex((o) => o.path === path);
  const [before, after] = [g.background, [...g.background, ...run.changes]].map((c) =>
    inputsAfter(g.plant, c),
  );
  const goesElsewhere =
    before.some((v, i) => Math.abs(v - after[i]) > 1e-9 * Math.abs(v)) ||
    run.changes.some((c) => c.lasts === null && isLoopChange(g.scenario.loops, c));
  let reference = (t: number): number => quiet.courses.value(output, t);
  if (goesElsewhere) {
    const rest = run.ends && restFrom(g.plant, run.state, run.ends, g.horizon, 0);
    if (rest === null || !('state' in rest)) return { recovered: null, goesElsewhere };
    const final = rest.outputs[output];
    reference = () => final;
  }
  return { recovered: lastOutside(g, output, run.courses, reference, quiet.courses), goesElsewhere };
}

function lastOutside(
  g: Ground,
  output: number,
  courses: Courses,
  reference: (t: number) => number,
  quiet: Courses,
): number | null {
  const times = [...courses.looks().filter((t) => t >= g.first), courses.to];
  // The departure is measured from the run without the upset, whatever the end is.
  const departure = (t: number): number => Math.abs(courses.value(output, t) - quiet.value(output, t));
  const peak = times.reduce((m, t) => Math.max(m, departure(t)), 0);
  const scale = g.plant.system.outputs[output].scale;
  if (!(peak > 1e-6 * scale)) return g.first;
  const out = (t: number): boolean => Math.abs(courses.value(output, t) - reference(t)) > RECOVERED * peak;
  let k = times.length - 1;
  while (k >= 0 && !out(times[k])) k -= 1;
  if (k === times.length - 1) return null;
  if (k < 0) return g.first;
  let [a, b] = [times[k], times[k + 1]];
  while (b - a > 1) {
    const middle = (a + b) / 2;
    if (out(middle)) a = middle;
    else b = middle;
  }
  return b;
}

/** m³ of organic that feeds and tanks pump more than at first over the run, by the exact course of their flows. */
function pumped(g: Ground, { changes, courses }: Judged): number {
  const { scenario: s, plant } = g;
  const moved = new Map(movedFlows(plant, g.joined.loops).map((q) => [q.quantity, q.output]));
  const organic = [...s.feeds, ...s.tanks].filter((q) => q.phase === 'organic').map((q) => `${q.name}.flow`);
  return organic.reduce((sum, quantity) => {
    const output = moved.get(quantity);
    if (output !== undefined && courses.outputs.includes(output)) {
      const span = courses.to - courses.from;
      return sum + (courses.mean(output, courses.from, courses.to) - g.calm[output]) * span;
    }
    const own = [...g.background, ...changes].filter((c) => c.quantity === quantity);
    const input = plant.system.inputs.findIndex((i) => i.path === quantity);
    if (own.length === 0 || input < 0) return sum;
    const { times, values } = track(plant.inputs[input], own, g.horizon);
    let volume = -plant.inputs[input] * g.horizon;
    for (let k = 1; k < times.length; k++)
      volume += ((times[k] - times[k - 1]) * (values[k] + values[k - 1])) / 2;
    return sum + volume;
  }, 0);
}

/** What the broken limits and the extra organic cost by the prices stated: solutes by kg, organic feeds by m³. */
function costOf(g: Ground, limits: readonly LimitFigures[], extraSolvent: number): number | null {
  const prices = g.scenario.commissioning?.prices ?? null;
  if (prices === null) return null;
  const organic = g.scenario.feeds.find((f) => f.phase === 'organic' && prices.streams.has(f.name));
  const lost = limits.reduce((sum, l) => {
    const each = prices.solutes.get(l.limit.quantity);
    return each === undefined || l.more === null || l.limit.side === 'above'
      ? sum
      : sum + each * Math.max(0, l.more);
  }, 0);
  return lost + (organic ? (prices.streams.get(organic.name) ?? 0) * Math.max(0, extraSolvent) : 0);
}
