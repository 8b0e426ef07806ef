import { hint } from './nearest.ts';
import { type Problem, Refusal } from './refusal.ts';
import type { Path, Phase } from './scenario.ts';

/** Who makes a stream. A draw is made by a stage of a train. */
export type Maker =
  | { readonly kind: 'feed' | 'tank' | 'train' | 'split' | 'blend'; readonly index: number }
  | { readonly kind: 'draw'; readonly index: number; readonly stage: number };

/** Who takes a stream. A side feed is taken by a stage of a train. */
export type User =
  | { readonly kind: 'tank' | 'train' | 'split' | 'blend'; readonly index: number }
  | { readonly kind: 'stage'; readonly index: number; readonly stage: number };

/** A named stream: who makes it, who takes it. An outlet is taken by nobody. */
export interface Stream {
  readonly name: string;
  readonly phase: Phase;
  readonly maker: Maker;
  readonly user: User | null;
}

/** What sets flows: a feed, or a tank's pump. */
export interface Origin {
  readonly kind: 'feed' | 'tank';
  readonly index: number;
}

export interface Network {
  readonly streams: ReadonlyMap<string, Stream>;
  readonly outlets: readonly Stream[];
  /** The streams from which the flow of a stream follows; none where a feed or a pump sets it. */
  behind(stream: string): readonly string[];
  /** The feeds and pumped tanks that set the flow of a stream: in full vessels a flow passes at once. */
  origins(stream: string): readonly Origin[];
  /** Streams of a phase that enter a stage of a train from the side. */
  sides(train: number, stage: number, phase: Phase): readonly string[];
}

/** What of a scenario says how streams join. */
export interface Joints {
  /** Feeds that wait to be swapped in. */
  readonly spare?: ReadonlySet<string>;
  readonly feeds: readonly { readonly name: string; readonly phase: Phase }[];
  readonly tanks: readonly {
    readonly name: string;
    readonly phase: Phase;
    readonly from: string;
    readonly to: string;
    readonly flow: number | null;
    readonly makeUp?: string | null;
  }[];
  readonly trains: readonly {
    readonly name: string;
    readonly aqueous: { readonly from: string; readonly to: string };
    readonly organic: { readonly from: string; readonly to: string };
    readonly sides: readonly { readonly stage: number; readonly stream: string }[];
    readonly draws: readonly { readonly stage: number; readonly name: string; readonly phase: Phase }[];
  }[];
  readonly splits: readonly { readonly stream: string; readonly branches: readonly string[] }[];
  readonly blends: readonly { readonly name: string; readonly of: readonly string[] }[];
}

interface End {
  readonly path: Path;
  /** Null: that of the stream, as for what a split or a blend takes and makes. */
  readonly phase: Phase | null;
  readonly who: string;
}
type Made = End & { readonly maker: Maker };
type Used = End & { readonly user: User };

/** All ends of all streams, as the scenario names them. */
class Ends {
  readonly makers = new Map<string, Made>();
  readonly users = new Map<string, Used>();
  readonly problems: Problem[] = [];

  constructor(s: Joints) {
    s.feeds.forEach((f, index) => {
      if (s.spare?.has(f.name)) return;
      const path = ['feeds', f.name];
      this.#make(f.name, { path, phase: f.phase, who: `feed ${f.name}`, maker: { kind: 'feed', index } });
    });
    s.tanks.forEach((t, index) => {
      const at = ['tanks', t.name];
      const end = { phase: t.phase, who: `tank ${t.name}` };
      const own = { kind: 'tank', index } as const;
      this.#make(t.to, { ...end, path: [...at, 'to'], maker: own });
      this.#use(t.from, { ...end, path: [...at, 'from'], user: own });
      if (t.makeUp) this.#use(t.makeUp, { ...end, path: [...at, 'make_up'], user: own });
    });
    s.trains.forEach((t, index) => {
      for (const phase of ['aqueous', 'organic'] as const) {
        const end = { path: ['trains', t.name, phase], phase, who: `train ${t.name} (${phase})` };
        this.#make(t[phase].to, { ...end, maker: { kind: 'train', index } });
        this.#use(t[phase].from, { ...end, user: { kind: 'train', index } });
      }
      const at = (stage: number, key: string): Path => ['trains', t.name, `stage ${stage + 1}`, key];
      const who = (stage: number): string => `stage ${stage + 1} of ${t.name}`;
      for (const { stage, stream } of t.sides)
        this.#use(stream, {
          path: at(stage, 'takes'),
          phase: null,
          who: who(stage),
          user: { kind: 'stage', index, stage },
        });
      for (const { stage, name, phase } of t.draws)
        this.#make(name, {
          path: [...at(stage, 'draws'), name],
          phase,
          who: who(stage),
          maker: { kind: 'draw', index, stage },
        });
    });
    s.splits.forEach((q, index) => {
      const at = ['splits', q.stream];
      const end = { phase: null, who: `the split of ${q.stream}` };
      this.#use(q.stream, { ...end, path: at, user: { kind: 'split', index } });
      for (const name of q.branches)
        this.#make(name, { ...end, path: [...at, name], maker: { kind: 'split', index } });
    });
    s.blends.forEach((b, index) => {
      const end = { path: ['blends', b.name], phase: null, who: `the blend ${b.name}` };
      this.#make(b.name, { ...end, maker: { kind: 'blend', index } });
      for (const name of b.of) this.#use(name, { ...end, user: { kind: 'blend', index } });
    });
  }

  #make(name: string, end: Made): void {
    const other = this.makers.get(name);
    if (other) {
      const pumps = end.phase === 'organic' && end.maker.kind === 'tank' && other.maker.kind === 'tank';
      const why = pumps ? ' (the flow of a loop is set by exactly one pump)' : '';
      this.problems.push({
        path: end.path,
        message: `'${name}' has two makers: ${other.who} and ${end.who}${why}; rename one, or join them under blends`,
      });
    } else this.makers.set(name, end);
  }

  #use(name: string, end: Used): void {
    const other = this.users.get(name);
    if (other)
      this.problems.push({
        path: end.path,
        message: `'${name}' has two takers: ${other.who} and ${end.who}; divide it under splits`,
      });
    else this.users.set(name, end);
  }
}

/**
 * The phase of every stream whose maker is known: stated, or that of the stream which it is split off or blended of.
 * What goes in a circle without ever being stated has none.
 */
export function phases(s: Joints): ReadonlyMap<string, Phase> {
  const { makers } = new Ends(s);
  const known = new Map<string, Phase | null>();
  const find = (name: string): Phase | null => {
    const found = known.get(name);
    if (found !== undefined) return found;
    known.set(name, null);
    const made = makers.get(name);
    if (!made) return null;
    const { maker } = made;
    const phase =
      made.phase ??
      (maker.kind === 'split'
        ? find(s.splits[maker.index].stream)
        : (s.blends[maker.index].of.map(find).find((p) => p !== null) ?? null));
    known.set(name, phase);
    return phase;
  };
  return new Map([...makers.keys()].flatMap((n) => (find(n) === null ? [] : [[n, find(n) as Phase]])));
}

/**
 * Joins feeds, tanks, trains, splits and blends by the names of their streams.
 *
 * @throws Refusal naming every stream that nobody makes, that two make or take, or that has the wrong phase, every
 * feed that nobody takes, and every loop whose flow no pump sets.
 */
export function network(s: Joints): Network {
  const { makers, users, problems } = new Ends(s);
  const phaseOf = phases(s);
  // What is near a wrong name is a stream that lacks its other end.
  const untaken = [...makers.keys()].filter((n) => !users.has(n));
  const unmade = [...users.keys()].filter((n) => !makers.has(n));
  for (const [name, u] of users) {
    const m = makers.get(name);
    const expected = u.phase ?? (u.user.kind === 'blend' ? blendPhase(s, u.user.index, phaseOf) : null);
    const phase = phaseOf.get(name);
    if (!m)
      problems.push({
        path: u.path,
        message: `nobody makes the stream '${name}'${hint(name, untaken) || '; let a feed, a tank or an outlet of a train have this name'}`,
      });
    else if (expected !== null && phase !== undefined && phase !== expected)
      problems.push({
        path: u.path,
        message: `'${name}' is ${phase} (${m.who}), but ${u.who} takes it as ${expected}; look at both ends of it`,
      });
  }
  for (const [name, m] of makers)
    if (m.maker.kind === 'feed' && !users.has(name))
      problems.push({
        path: m.path,
        message: `nobody takes the feed '${name}'${hint(name, unmade) || '; let a train, a tank or a blend take it, or take it out'}`,
      });
  if (problems.length > 0) throw new Refusal(problems);

  const sides = (train: number, stage: number, phase: Phase): readonly string[] =>
    s.trains[train].sides
      .filter((q) => q.stage === stage && phaseOf.get(q.stream) === phase)
      .map((q) => q.stream);
  const behind = (name: string): readonly string[] => flowsFrom(s, name, makers, phaseOf);
  for (const loop of loops(makers.keys(), behind))
    problems.push({
      path: makers.get(loop[0])?.path ?? [],
      message: `the ${phaseOf.get(loop[0]) ?? ''} loop through '${loop[0]}' has no pump: give a tank in it a flow`,
    });
  if (problems.length > 0) throw new Refusal(problems);

  const streams = new Map<string, Stream>();
  for (const [name, m] of makers)
    streams.set(name, {
      name,
      phase: phaseOf.get(name) as Phase,
      maker: m.maker,
      user: users.get(name)?.user ?? null,
    });
  return {
    streams,
    outlets: [...streams.values()].filter((q) => q.user === null),
    behind,
    origins: originsOf(streams, behind),
    sides,
  };
}

const blendPhase = (s: Joints, index: number, phaseOf: ReadonlyMap<string, Phase>): Phase | null =>
  phaseOf.get(s.blends[index].name) ?? null;

/** The streams that a stream's flow follows from, one step upstream. */
function flowsFrom(
  s: Joints,
  name: string,
  makers: ReadonlyMap<string, Made>,
  phaseOf: ReadonlyMap<string, Phase>,
): readonly string[] {
  const maker = makers.get(name)?.maker;
  switch (maker?.kind) {
    case 'tank': {
      const t = s.tanks[maker.index];
      return t.flow === null ? [t.from, ...(t.makeUp ? [t.makeUp] : [])] : [];
    }
    case 'train':
    case 'draw': {
      const t = s.trains[maker.index];
      const phase = phaseOf.get(name) as Phase;
      return [t[phase].from, ...t.sides.filter((q) => phaseOf.get(q.stream) === phase).map((q) => q.stream)];
    }
    case 'split':
      return [s.splits[maker.index].stream];
    case 'blend':
      return s.blends[maker.index].of;
    default:
      return [];
  }
}

/** Circles of streams that each follow from the next, one of each set that is joined. */
function loops(names: Iterable<string>, behind: (name: string) => readonly string[]): string[][] {
  const done = new Set<string>();
  const found: string[][] = [];
  for (const start of names) {
    // Depth first with a stack of its own: a plant may have more trains in a row than calls can be nested.
    const trail: { name: string; next: number }[] = [];
    const open = new Set<string>();
    const enter = (name: string): void => {
      if (done.has(name)) return;
      if (open.has(name)) {
        const list = trail.map((t) => t.name);
        found.push(list.slice(list.indexOf(name)));
        return;
      }
      open.add(name);
      trail.push({ name, next: 0 });
    };
    enter(start);
    while (trail.length > 0) {
      const top = trail[trail.length - 1];
      const list = behind(top.name);
      if (top.next < list.length) {
        top.next += 1;
        enter(list[top.next - 1]);
      } else {
        trail.pop();
        open.delete(top.name);
        done.add(top.name);
      }
    }
  }
  return found;
}

function originsOf(
  streams: ReadonlyMap<string, Stream>,
  behind: (name: string) => readonly string[],
): Network['origins'] {
  const known = new Map<string, readonly Origin[]>();
  return (stream) => {
    const found = known.get(stream);
    if (found) return found;
    const passed = new Set([stream]);
    const origins: Origin[] = [];
    // A set grows while it is walked through.
    for (const name of passed) {
      const { maker } = streams.get(name) as Stream;
      const before = behind(name);
      if (before.length === 0) origins.push({ kind: maker.kind as Origin['kind'], index: maker.index });
      for (const b of before) passed.add(b);
    }
    known.set(stream, origins);
    return origins;
  };
}
