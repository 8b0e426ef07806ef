import type { Line } from '../../control/line.ts';
import { SampledLoop } from '../../control/loop.ts';
import type { FeedforwardSpec, LoopSpec } from '../../control/spec.ts';
import { type Joined, join, type Shown, type Station } from '../../control/stations.ts';
import { type AssembleOptions, assemble, type Plant } from '../../plant/assemble.ts';
import { track } from '../../plant/course.ts';
import { changesOf, loopsUnder, modesOf, outOfService, statedChanges } from '../../scenario/loop-changes.ts';
import type { Loop } from '../../scenario/loops.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import type { F } from '../../solve/system.ts';

/** A plant with its loops: the System has stations and shown values joined to it, and devices can be made for a run. */
export interface ControlledPlant {
  readonly plant: Plant;
  readonly loops: readonly JoinedLoop[];
}

/** A loop and where it stands in the System. */
export interface JoinedLoop {
  readonly loop: Loop;
  readonly spec: LoopSpec;
  /** Loop of which it moves the set point, by number; −1: it moves a flow. */
  readonly inner: number;
  /** Whether something in the scenario can make it move anything: otherwise no station is joined for it. */
  readonly awake: boolean;
  /** Places of its station: of the flow, and of the filtered wild flow (−1: none). */
  readonly flowPlace: number;
  readonly wildPlace: number;
}

/** Share of the wild flow at the start below which a ratio means nothing. */
const NO_FLOW = 1e-3;

export interface ControlOptions extends AssembleOptions {
  /** Changes that some run may make besides those of the scenario, about loops and about what they move. */
  readonly possible?: readonly Change[];
}

/** Scenario → plant with its loops. Without loops it is the plant itself. @throws Refusal as `assemble` does. */
export function controlled(s: Scenario, options: ControlOptions = {}): ControlledPlant {
  const loops = s.loops ?? [];
  if (loops.length === 0) return { plant: assemble(s, options), loops: [] };
  const awake = loopsUnder(loops, [...statedChanges(s), ...(options.possible ?? [])]).map((l) =>
    isAwake(l, s, options.possible ?? []),
  );
  const moved = loops.flatMap((l, i) => (awake[i] && l.move.kind !== 'set point' ? [l.move.quantity] : []));
  const inner = assemble(s, {
    ...options,
    moving: new Set([
      ...(options.moving ?? [...s.upsets, ...(options.possible ?? [])].map((u) => u.quantity)),
      ...moved,
    ]),
  });
  const input = (path: string): number => inner.system.inputs.findIndex((q) => q.path === path);
  const value = (path: string): number => inner.inputs[input(path)];
  const stated = loops.map((l) => outputOf(l, value));
  const stations = loops.flatMap((l, i): (Station & { of: number })[] =>
    awake[i] && l.move.kind !== 'set point'
      ? [
          {
            of: i,
            name: l.name,
            flow: input(l.move.quantity),
            wild: l.move.over === null ? -1 : input(l.move.over),
            lag: l.move.flowLag,
            filter: l.move.flowFilter,
            low: l.move.flowLow,
            high: l.move.flowHigh,
            output: outputNamed(l, stated[i]),
          },
        ]
      : [],
  );
  const shown = loops.flatMap((l, i): (Shown & { of: number; what: string })[] => {
    const scale = Math.max(l.keepAt, 1e-6);
    const content = (what: string) => ({ of: i, what, path: `${l.name}.${what}`, unit: 'kg/m^3', scale });
    const asleep = !awake[i] && l.move.kind !== 'set point';
    return [
      content('measurement'),
      content('set point'),
      ...(asleep ? [{ of: i, what: 'output', ...outputNamed(l, stated[i]) }] : []),
    ];
  });
  const joined = join(inner.system, stations, shown);
  const plant = extended(inner, joined, stations, shown, loops, stated);
  const at = (of: number, what: string): number =>
    joined.shown[shown.findIndex((q) => q.of === of && q.what === what)];
  const list = loops.map((loop, i): JoinedLoop => {
    const own = stations.findIndex((q) => q.of === i);
    const innerLoop =
      loop.move.kind === 'set point' ? loops.findIndex((o) => o.name === loop.move.quantity) : -1;
    const station = own < 0 ? null : joined.stations[own];
    const output = innerLoop >= 0 ? at(innerLoop, 'set point') : (station?.output ?? at(i, 'output'));
    const isInner = loops.some((o) => o.move.kind === 'set point' && o.move.quantity === loop.name);
    return {
      loop,
      inner: innerLoop,
      awake: awake[i],
      flowPlace: station?.flowPlace ?? -1,
      wildPlace: station?.wildPlace ?? -1,
      spec: specOf(loop, plant, isInner, {
        output,
        gate: station?.gate ?? -1,
        measurement: at(i, 'measurement'),
        setPoint: at(i, 'set point'),
        flow: own < 0 ? -1 : stations[own].flow,
        wild: own < 0 ? -1 : stations[own].wild,
        overruling: overruling(loop, plant),
      }),
    };
  });
  return { plant, loops: list };
}

/** Devices for one run, in the order in which they act at one moment: an outer loop before the one it leads. */
export const devicesOf = (c: ControlledPlant, atRest: boolean): SampledLoop[] =>
  inOrder(c, (spec, inner) => new SampledLoop(spec, inner, atRest));

/** Devices for a run that goes on at `t` [s] from where others were. */
export const resumedDevices = (c: ControlledPlant, were: readonly SampledLoop[], t: number): SampledLoop[] =>
  inOrder(c, (spec, inner) => {
    const was = were.find((d) => d.name === spec.name) as SampledLoop;
    return SampledLoop.resumed(was, spec, inner, t);
  });

function inOrder(
  c: ControlledPlant,
  make: (spec: LoopSpec, inner: SampledLoop | null) => SampledLoop,
): SampledLoop[] {
  const inners = c.loops.filter((l) => l.inner < 0).map((l) => make(l.spec, null));
  const byName = new Map(inners.map((d) => [d.name, d]));
  const outers = c.loops.flatMap((l) =>
    l.inner < 0 ? [] : [make(l.spec, byName.get(c.loops[l.inner].loop.name) ?? null)],
  );
  return [...outers, ...inners];
}

/** The same plant with its loops told other things; `possible` of `controlled` must have held them. */
export function retold(c: ControlledPlant, changes: readonly Change[]): ControlledPlant {
  if (c.loops.length === 0) return c;
  const loops = loopsUnder(
    c.loops.map((l) => l.loop),
    changes,
  );
  return {
    ...c,
    loops: c.loops.map((l, i) => {
      const isInner = l.spec.setPoint.times.length === 0;
      const spec = { ...l.spec, ...told(loops[i], c.plant, isInner, l.spec.inputs) };
      return { ...l, loop: loops[i], spec };
    }),
  };
}

/** In manual, with nothing that it would have to follow, a loop leaves the plant as it is. */
function isAwake(l: Loop, s: Scenario, possible: readonly Change[]): boolean {
  return (
    l.controller.auto ||
    changesOf(l, 'mode').length > 0 ||
    changesOf(l, 'output').length > 0 ||
    outOfService(l).length > 0 ||
    (l.move.over !== null && [...s.upsets, ...possible].some((u) => u.quantity === l.move.over)) ||
    (s.loops ?? []).some((o) => o.move.kind === 'set point' && o.move.quantity === l.name)
  );
}

const outputNamed = (l: Loop, stated: number): Shown => ({
  path: `${l.name}.output`,
  unit: l.move.kind === 'ratio' ? '' : 'm^3/s',
  scale: Math.abs(stated) || 1,
});

/** The output that the flows of the scenario at time zero stand for. */
function outputOf(l: Loop, value: (path: string) => number): number {
  if (l.move.kind === 'set point') return Number.NaN;
  return value(l.move.quantity) / (l.move.over === null ? 1 : value(l.move.over));
}

function extended(
  inner: Plant,
  joined: Joined,
  stations: readonly (Station & { of: number })[],
  shown: readonly { of: number; what: string }[],
  loops: readonly Loop[],
  stated: readonly number[],
): Plant {
  const inputs = new Float64Array(joined.system.inputs.length);
  inputs.set(inner.inputs);
  const barren = new Float64Array(joined.system.places.length);
  barren.set(inner.barren);
  joined.stations.forEach((q, k) => {
    inputs[q.output] = stated[stations[k].of];
    inputs[q.gate] = 1;
    if (q.flowPlace >= 0) barren[q.flowPlace] = inner.inputs[stations[k].flow];
    if (q.wildPlace >= 0) barren[q.wildPlace] = inner.inputs[stations[k].wild];
  });
  joined.shown.forEach((i, k) => {
    const { of, what } = shown[k];
    inputs[i] = what === 'output' ? stated[of] : loops[of].keepAt;
  });
  return { ...inner, system: joined.system, inputs, barren };
}

function overruling(l: Loop, plant: Plant): number[] {
  const name = l.move.quantity.replace(/\.flow$/, '');
  return [`${name}.pump`, `${name}.not empty`]
    .map((path) => plant.system.inputs.findIndex((q) => q.path === path))
    .filter((i) => i >= 0);
}

function specOf(l: Loop, plant: Plant, isInner: boolean, inputs: LoopSpec['inputs']): LoopSpec {
  const { outputs } = plant.system;
  const at = (path: string): number => outputs.findIndex((o) => o.path === path);
  const flowOf = (path: string): number => at(`${path.slice(0, path.lastIndexOf('.'))}.flow`);
  const { controller: c, feedforward: f } = l;
  const wild = inputs.wild < 0 ? 0 : plant.inputs[inputs.wild];
  const ahead: FeedforwardSpec | null = f && {
    measured: at(f.from),
    weighedBy: flowOf(f.from),
    analyser: f.analyser,
    seed: f.seed,
    gain: f.gain,
    lead: f.lead,
    lag: f.lag,
    form: f.form,
  };
  return {
    name: l.name,
    measured: at(l.measure.of),
    weighedBy: flowOf(l.measure.of),
    analyser: l.measure.analyser,
    seed: l.measure.seed,
    move: {
      low: l.move.low,
      high: l.move.high,
      up: l.move.slewUp,
      down: l.move.slewDown,
      leastWild: NO_FLOW * wild,
      flowLow: l.move.flowLow,
      flowHigh: l.move.flowHigh,
    },
    settings: {
      sense: c.action === 'direct' ? 1 : -1,
      gain: c.gain,
      integralTime: c.integralTime,
      derivativeTime: c.derivativeTime,
      filter: c.filter,
      setPointWeight: c.setPointWeight,
    },
    runs: c.scan === null ? 'on each result' : 'scan',
    ...told(l, plant, isInner, inputs),
    auto: c.auto,
    feedforward: ahead,
    inputs,
  };
}

/** What a loop is told over the time of a run. */
function told(
  l: Loop,
  plant: Plant,
  isInner: boolean,
  inputs: LoopSpec['inputs'],
): Pick<LoopSpec, 'modes' | 'service' | 'setPoint' | 'limits' | 'manual'> {
  const { horizon } = plant.scenario;
  const [low, high, output] = (['low', 'high', 'output'] as const).map((what) => changesOf(l, what));
  return {
    modes: modeChanges(l),
    service: outOfService(l)
      .flatMap((q) => [{ at: q.from, on: false }, ...(q.to === null ? [] : [{ at: q.to, on: true }])])
      .sort((a, b) => a.at - b.at),
    setPoint: isInner ? { times: [], values: [] } : line(l.keepAt, changesOf(l, 'set point'), horizon),
    limits:
      low.length + high.length === 0
        ? null
        : { low: line(l.move.low, low, horizon), high: line(l.move.high, high, horizon) },
    manual: output.length === 0 ? null : line(plant.inputs[inputs.output], output, horizon),
  };
}

function line(initial: number, changes: readonly Change[], horizon: number): Line {
  if (changes.length === 0) return { times: [0], values: [initial] };
  // A procedure goes on for as long as it needs.
  const end = Math.max(horizon, ...changes.map((c) => c.at + (c.lasts ?? 0) + c.over + 1));
  const { times, values } = track(initial, changes, end);
  return { times, values };
}

/** Modes as the scenario sets them; what puts a loop in manual for a while gives back the mode that it had. */
function modeChanges(l: Loop): LoopSpec['modes'] {
  const said = modesOf(l).map((m) => ({ at: m.at, auto: m.auto }));
  const before = (t: number): boolean =>
    said.filter((m) => m.at < t).sort((a, b) => b.at - a.at)[0]?.auto ?? l.controller.auto;
  const taken = outOfService(l).flatMap((q) => [
    { at: q.from, auto: false },
    ...(q.to === null || !before(q.from) ? [] : [{ at: q.to, auto: true }]),
  ]);
  return [...said, ...taken].sort((a, b) => a.at - b.at);
}

/** The outputs of a plant at a state. */
export function outputsOf(plant: Plant, x: F, w: F): F {
  const y = new Float64Array(plant.system.outputs.length);
  plant.system.output(x, w, plant.parameters, y);
  return y;
}
