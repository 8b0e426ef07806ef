import { hint } from './nearest.ts';
import { type Problem, Refusal } from './refusal.ts';
import type { Path, Phase } from './scenario.ts';

export type Maker = { readonly kind: 'feed' | 'tank' | 'train'; readonly index: number };
export type User = { readonly kind: 'tank' | 'train'; readonly index: number };

/** A named stream: who makes it, who takes it. An outlet is taken by nobody. */
export interface Stream {
  readonly name: string;
  readonly phase: Phase;
  readonly maker: Maker;
  readonly user: User | null;
}

export interface Network {
  readonly streams: ReadonlyMap<string, Stream>;
  readonly outlets: readonly Stream[];
  /** The feed or pumped tank that sets the flow of a stream: in full vessels a flow passes at once. */
  flowSource(stream: string): Maker;
}

/** What of a scenario says how streams join. */
export interface Joints {
  readonly feeds: readonly { readonly name: string; readonly phase: Phase }[];
  readonly tanks: readonly {
    readonly name: string;
    readonly phase: Phase;
    readonly from: string;
    readonly to: string;
    readonly flow: number | null;
  }[];
  readonly trains: readonly {
    readonly name: string;
    readonly aqueous: { readonly from: string; readonly to: string };
    readonly organic: { readonly from: string; readonly to: string };
  }[];
}

interface End {
  readonly path: Path;
  readonly phase: Phase;
  readonly who: string;
}

/**
 * Joins feeds, tanks and trains by the names of their streams.
 *
 * @throws Refusal naming every stream that nobody makes, that two make or take, or that has the wrong phase, every
 * feed that nobody takes, and every loop whose flow no pump sets.
 */
export function network(s: Joints): Network {
  const problems: Problem[] = [];
  const makers = new Map<string, End & { maker: Maker }>();
  const users = new Map<string, End & { user: User }>();
  const make = (name: string, end: End, maker: Maker): void => {
    const other = makers.get(name);
    if (other) {
      const pumps = end.phase === 'organic' && maker.kind === 'tank' && other.maker.kind === 'tank';
      const why = pumps ? ' (the flow of a loop is set by exactly one pump)' : '';
      problems.push({
        path: end.path,
        message: `'${name}' has two makers: ${other.who} and ${end.who}${why}`,
      });
    } else makers.set(name, { ...end, maker });
  };
  const use = (name: string, end: End, user: User): void => {
    const other = users.get(name);
    if (other)
      problems.push({ path: end.path, message: `'${name}' has two takers: ${other.who} and ${end.who}` });
    else users.set(name, { ...end, user });
  };
  s.feeds.forEach((f, index) => {
    const path = ['feeds', f.name];
    make(f.name, { path, phase: f.phase, who: `feed ${f.name}` }, { kind: 'feed', index });
  });
  s.tanks.forEach((t, index) => {
    const end = { path: ['tanks', t.name], phase: t.phase, who: `tank ${t.name}` };
    make(t.to, { ...end, path: ['tanks', t.name, 'to'] }, { kind: 'tank', index });
    use(t.from, { ...end, path: ['tanks', t.name, 'from'] }, { kind: 'tank', index });
  });
  s.trains.forEach((t, index) => {
    for (const phase of ['aqueous', 'organic'] as const) {
      const end = { path: ['trains', t.name, phase], phase, who: `train ${t.name} (${phase})` };
      make(t[phase].to, end, { kind: 'train', index });
      use(t[phase].from, end, { kind: 'train', index });
    }
  });

  // What is near a wrong name is a stream that lacks its other end.
  const untaken = [...makers.keys()].filter((n) => !users.has(n));
  const unmade = [...users.keys()].filter((n) => !makers.has(n));
  for (const [name, u] of users) {
    const m = makers.get(name);
    if (!m)
      problems.push({ path: u.path, message: `nobody makes the stream '${name}'${hint(name, untaken)}` });
    else if (m.phase !== u.phase)
      problems.push({
        path: u.path,
        message: `'${name}' is ${m.phase} (${m.who}), but ${u.who} takes it as ${u.phase}`,
      });
  }
  for (const [name, m] of makers)
    if (m.maker.kind === 'feed' && !users.has(name))
      problems.push({ path: m.path, message: `nobody takes the feed '${name}'${hint(name, unmade)}` });
  if (problems.length > 0) throw new Refusal(problems);

  const streams = new Map<string, Stream>();
  for (const [name, m] of makers)
    streams.set(name, { name, phase: m.phase, maker: m.maker, user: users.get(name)?.user ?? null });

  const sources = flowSources(s, streams);
  for (const loop of sources.loops)
    problems.push({
      path: makers.get(loop[0])?.path ?? [],
      message: `the ${streams.get(loop[0])?.phase} loop through '${loop[0]}' has no pump: give a tank in it a flow`,
    });
  if (problems.length > 0) throw new Refusal(problems);
  return {
    streams,
    outlets: [...streams.values()].filter((q) => q.user === null),
    flowSource: (name) => sources.of.get(name) as Maker,
  };
}

/** Follows each stream upstream to the feed or pump that sets its flow, or around a loop in which nothing does. */
function flowSources(
  s: Joints,
  streams: ReadonlyMap<string, Stream>,
): { readonly of: ReadonlyMap<string, Maker>; readonly loops: readonly (readonly string[])[] } {
  const of = new Map<string, Maker>();
  const loops: string[][] = [];
  const looping = new Set<string>();
  for (const start of streams.keys()) {
    const passed = new Set<string>();
    let name = start;
    let source: Maker | undefined;
    while (source === undefined && !looping.has(name)) {
      source = of.get(name);
      if (source !== undefined) break;
      if (passed.has(name)) {
        const list = [...passed];
        loops.push(list.slice(list.indexOf(name)));
        break;
      }
      passed.add(name);
      const { maker, phase } = streams.get(name) as Stream;
      const passes = maker.kind === 'train' || (maker.kind === 'tank' && s.tanks[maker.index].flow === null);
      if (!passes) source = maker;
      else name = maker.kind === 'train' ? s.trains[maker.index][phase].from : s.tanks[maker.index].from;
    }
    for (const p of passed) {
      if (source) of.set(p, source);
      else looping.add(p);
    }
  }
  return { of, loops };
}
