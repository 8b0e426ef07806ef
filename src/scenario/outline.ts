import { loopTargets } from './loop-targets.ts';
import { phases } from './network.ts';
import {
  isObject,
  type Loose,
  looseBlends,
  looseDraws,
  looseSides,
  looseSplits,
  STAGE,
} from './outline-circuit.ts';
import type { Phase } from './scenario.ts';

/** What a path in a scenario points at. */
export interface Target {
  readonly what:
    | 'flow'
    | 'content'
    | 'mixer'
    | 'volume'
    | 'speed'
    | 'stage'
    | 'pump'
    | 'weir'
    | 'continuity'
    | 'share'
    | 'purity'
    | 'removal'
    | 'mode'
    | 'output'
    | 'feed';
  readonly phase: Phase;
  readonly component?: string;
}

/**
 * The names in a scenario and how they hang together, taken from the file as far as it makes sense: so that wrong
 * names are found in the same pass as wrong figures.
 */
export interface Outline {
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  readonly feeds: readonly { readonly name: string; readonly phase: Phase }[];
  readonly tanks: readonly {
    readonly name: string;
    readonly phase: Phase;
    readonly from: string;
    readonly to: string;
    readonly flow: number | null;
    readonly makeUp: string | null;
    readonly removes: unknown;
  }[];
  readonly trains: readonly {
    readonly name: string;
    readonly stages: number;
    readonly aqueous: { readonly from: string; readonly to: string };
    readonly organic: { readonly from: string; readonly to: string };
    readonly sides: readonly { readonly stage: number; readonly stream: string }[];
    readonly draws: readonly {
      readonly stage: number;
      readonly name: string;
      readonly phase: Phase;
      readonly by: 'share' | 'flow';
    }[];
  }[];
  readonly splits: readonly {
    readonly stream: string;
    readonly branches: readonly string[];
    readonly by: readonly ('share' | 'flow' | 'rest')[];
  }[];
  readonly blends: readonly { readonly name: string; readonly of: readonly string[] }[];
  readonly batches: readonly string[];
  /** Feeds that nobody takes until an upset swaps one in. */
  readonly spare: ReadonlySet<string>;
  /** `stage 2` …: settings of single stages, as the trains have them. */
  readonly stageKeys: readonly string[];
  /** False where the lists of solutes or species make no sense: then keys and paths with their names cannot be judged. */
  readonly named: boolean;
  /** False where something was too broken to be taken: then streams cannot be judged. */
  readonly whole: boolean;
  /** Inputs that upsets may change. */
  readonly changeable: ReadonlyMap<string, Target>;
  /** Quantities that a limit may be put on. */
  readonly limitable: ReadonlyMap<string, Target>;
}

const isListOfNames = (v: unknown): boolean => Array.isArray(v) && v.every((n) => typeof n === 'string');
const names = (v: unknown): string[] =>
  Array.isArray(v) ? v.filter((n): n is string => typeof n === 'string') : [];
const isPhase = (v: unknown): v is Phase => v === 'aqueous' || v === 'organic';

export function outline(raw: unknown): Outline {
  const top = isObject(raw) ? raw : {};
  const solutes = names(top.solutes);
  const species = names(top.species);
  const named =
    isListOfNames(top.solutes) &&
    solutes.length > 0 &&
    (top.species === undefined || isListOfNames(top.species));
  const alone = top.batches !== undefined;
  let whole = alone || (top.feeds !== undefined && top.trains !== undefined);
  const entries = (v: unknown): [string, Loose][] => {
    if (v === undefined) return [];
    if (!isObject(v)) {
      whole = false;
      return [];
    }
    return Object.entries(v).flatMap(([name, value]): [string, Loose][] => {
      if (isObject(value)) return [[name, value]];
      whole = false;
      return [];
    });
  };
  const keep = <T>(value: T | null): T[] => {
    if (value === null) whole = false;
    return value === null ? [] : [value];
  };
  const feeds = entries(top.feeds).flatMap(([name, f]) =>
    keep(isPhase(f.phase) ? { name, phase: f.phase } : null),
  );
  const tanks = entries(top.tanks).flatMap(([name, t]) =>
    keep(
      isPhase(t.phase) && typeof t.from === 'string' && typeof t.to === 'string'
        ? {
            name,
            phase: t.phase,
            from: t.from,
            to: t.to,
            flow: t.flow === undefined ? null : 1,
            makeUp: typeof t.make_up === 'string' ? t.make_up : null,
            removes: t.removes,
          }
        : null,
    ),
  );
  const trains = entries(top.trains).flatMap(([name, t]) => {
    const aqueous = arrow(t.aqueous);
    const organic = arrow(t.organic);
    const stages = Number.isInteger(t.stages) ? (t.stages as number) : 1;
    const sides = looseSides(t);
    const draws = looseDraws(t);
    return keep(
      aqueous && organic && sides && draws ? { name, stages, aqueous, organic, sides, draws } : null,
    );
  });
  const splits = entries(top.splits).flatMap(([stream, q]) => keep(looseSplits(stream, q)));
  const blends = isObject(top.blends)
    ? Object.entries(top.blends).flatMap(([name, of]) => keep(looseBlends(name, of)))
    : [];
  if (top.blends !== undefined && !isObject(top.blends)) whole = false;
  const batches = entries(top.batches).map(([name]) => name);

  const changeable = new Map<string, Target>();
  const limitable = new Map<string, Target>();
  const stream = (name: string, phase: Phase, into: Map<string, Target>): void => {
    into.set(`${name}.flow`, { what: 'flow', phase });
    for (const c of phase === 'aqueous' ? [...solutes, ...species] : solutes)
      into.set(`${name}.${c}`, { what: 'content', phase, component: c });
    if (into === limitable && solutes.length > 1)
      for (const c of solutes) into.set(`${name}.purity of ${c}`, { what: 'purity', phase, component: c });
  };
  const phaseOf = phases({ feeds, tanks, trains, splits, blends });
  for (const f of feeds) {
    stream(f.name, f.phase, changeable);
    changeable.set(f.name, { what: 'feed', phase: f.phase });
    stream(f.name, f.phase, limitable);
  }
  for (const t of tanks) {
    if (t.flow !== null) {
      changeable.set(`${t.name}.flow`, { what: 'flow', phase: t.phase });
      changeable.set(`${t.name}.pump`, { what: 'pump', phase: t.phase });
    }
    for (const c of isObject(t.removes) ? Object.keys(t.removes) : [])
      if (solutes.includes(c))
        changeable.set(`${t.name}.removal of ${c}`, { what: 'removal', phase: t.phase, component: c });
    stream(t.to, t.phase, limitable);
    stream(t.name, t.phase, limitable);
    limitable.delete(`${t.name}.flow`);
    limitable.set(`${t.name}.volume`, { what: 'volume', phase: t.phase });
  }
  const takes = (name: string, by: 'share' | 'flow' | 'rest'): void => {
    const phase = phaseOf.get(name) ?? 'aqueous';
    stream(name, phase, limitable);
    if (by !== 'rest') changeable.set(`${name}.${by}`, { what: by, phase });
  };
  for (const q of splits) for (const [i, name] of q.branches.entries()) takes(name, q.by[i]);
  for (const b of blends) stream(b.name, phaseOf.get(b.name) ?? 'aqueous', limitable);
  for (const name of batches) {
    for (const phase of ['aqueous', 'organic'] as const) {
      stream(`${name} ${phase}`, phase, limitable);
      limitable.delete(`${name} ${phase}.flow`);
    }
    changeable.set(`${name}.mixer`, { what: 'mixer', phase: 'aqueous' });
    changeable.set(`${name}.mixer.speed`, { what: 'speed', phase: 'aqueous' });
  }
  for (const t of trains) {
    for (const q of t.draws) takes(q.name, q.by);
    stream(t.aqueous.to, 'aqueous', limitable);
    stream(t.organic.to, 'organic', limitable);
    for (let j = 1; j <= Math.min(t.stages, 10_000); j++)
      for (const [path, what] of stageTargets(`${t.name}.${j}`))
        changeable.set(path, { what, phase: 'aqueous' });
  }
  for (const [path, target] of loopTargets(top.loops, limitable)) changeable.set(path, target);
  const stageKeys = entries(top.trains)
    .flatMap(([, t]) => Object.keys(t))
    .filter((k) => STAGE.test(k));
  return {
    solutes,
    species,
    feeds,
    tanks,
    trains,
    splits,
    blends,
    batches,
    stageKeys: [...new Set(stageKeys)],
    spare: spareFeeds([...listed(top.upsets), ...movesOf(top.procedures), ...movesOf(top.answers)], feeds),
    named,
    whole,
    changeable,
    limitable,
  };
}

/** What can be changed in a stage. */
const stageTargets = (stage: string): [string, Target['what']][] => [
  [stage, 'stage'],
  [`${stage}.mixer`, 'mixer'],
  [`${stage}.mixer.speed`, 'speed'],
  [`${stage}.continuity`, 'continuity'],
  [`${stage}.settler.aqueous_weir`, 'weir'],
];

const listed = (v: unknown): unknown[] => (Array.isArray(v) ? v : []);
/** Moves of all procedures or answers. */
const movesOf = (v: unknown): unknown[] =>
  isObject(v) ? Object.values(v).flatMap((p) => (isObject(p) ? listed(p.moves) : [])) : [];

function spareFeeds(upsets: readonly unknown[], feeds: Outline['feeds']): Set<string> {
  const names = new Set(feeds.map((f) => f.name));
  return new Set(
    upsets.flatMap((u): string[] => {
      if (!isObject(u) || typeof u.change !== 'string' || typeof u.to !== 'string') return [];
      return names.has(u.change) && names.has(u.to) && u.change !== u.to ? [u.to] : [];
    }),
  );
}

function arrow(v: unknown): { from: string; to: string } | null {
  if (typeof v !== 'string') return null;
  const parts = v.split('->').map((p) => p.trim());
  return parts.length === 2 && parts[0] !== '' && parts[1] !== '' ? { from: parts[0], to: parts[1] } : null;
}
