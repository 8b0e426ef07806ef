import { readChange } from './changes.ts';
import { removalShares } from './circuit.ts';
import type { Commissioning, Procedure, Uncertain } from './commissioning.ts';
import { readCompare } from './compare.ts';
import { type Basis, content } from './content.ts';
import type { Figure } from './fields.ts';
import { jointsOf } from './joints.ts';
import { checkOwner } from './loop-ownership.ts';
import { hint } from './nearest.ts';
import { checkNeeds } from './needs.ts';
import { network } from './network.ts';
import type { Outline } from './outline.ts';
import { readPrices } from './prices.ts';
import { type Problem, Refusal } from './refusal.ts';
import { startOf } from './saved.ts';
import type { Feed, Initial, Path, Phase, Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { uncertainInputs } from './uncertain.ts';
import { quantity } from './units.ts';

type RawProcedure = NonNullable<RawScenario['procedures']>[string];

/** What the keys for the commissioning are judged against. */
export interface Surroundings {
  readonly outline: Outline;
  readonly basis: Basis;
  readonly folder: string;
  /** All feeds, those included that wait to be swapped in. */
  readonly feeds: readonly Feed[];
  /** kg/m³ by feed or tank at time zero. */
  readonly contents: ReadonlyMap<string, readonly number[]>;
}

/** The keys for the commissioning of a scenario that is built; complains in place. */
export function readCommissioning(
  raw: RawScenario,
  s: Scenario,
  around: Surroundings,
  problems: Problem[],
): Commissioning {
  return {
    samples: raw.samples
      ? { repeatability: raw.samples.repeatability.value, gap: raw.samples.gap.value }
      : null,
    prices: readPrices(raw.prices, s.solutes, pricedStreams(s), problems),
    procedures: Object.entries(raw.procedures ?? {}).map(([name, p]) => {
      if (name === PLAIN_START)
        problems.push({
          path: ['procedures', name],
          message: `'${name}' is the start without a procedure; choose another name`,
          atKey: true,
        });
      return new ProcedureReader(name, p, s, around, problems).read();
    }),
    uncertain: Object.entries(raw.uncertain ?? {}).flatMap(([path, text]) => range(path, text, s, problems)),
    compare: readCompare(raw.compare, around.outline, around.basis, around.folder, problems),
  };
}

/** What the start is called that no procedure changes. */
export const PLAIN_START = 'plain start';

/** Feeds and outlets; null where the streams do not join up, which is complained about elsewhere. */
function pricedStreams(s: Scenario): string[] | null {
  try {
    return [...s.feeds.map((f) => f.name), ...network(jointsOf(s)).outlets.map((q) => q.name)];
  } catch (e) {
    if (e instanceof Refusal) return null;
    throw e;
  }
}

function range(path: string, text: string | number, s: Scenario, problems: Problem[]): Uncertain[] {
  const at = ['uncertain', path];
  const known = [...uncertainInputs(s).keys()];
  if (!known.includes(path)) {
    const message = `unknown input ${show(path)}${hint(path, known)}`;
    problems.push({ path: at, message, atKey: true });
    return [];
  }
  const q = quantity(typeof text === 'string' ? text.replace(/^\s*(±|\+\/?-)\s*/, '') : text, 'a percentage');
  if ('wrong' in q)
    problems.push({ path: at, message: `expected a range such as '±20 %', got ${show(text)}` });
  else if (!(q.value > 0 && q.value < 1))
    problems.push({ path: at, message: `must lie between 0 and 100 %, got ${show(text)}` });
  else return [{ path, share: q.value }];
  return [];
}

class ProcedureReader {
  readonly #name: string;
  readonly #raw: RawProcedure;
  readonly #s: Scenario;
  readonly #around: Surroundings;
  readonly #problems: Problem[];

  constructor(name: string, raw: RawProcedure, s: Scenario, around: Surroundings, problems: Problem[]) {
    this.#name = name;
    this.#raw = raw;
    this.#s = s;
    this.#around = around;
    this.#problems = problems;
  }

  read(): Procedure {
    const { from, initial = {}, moves = [] } = this.#raw;
    if (from === undefined && Object.keys(initial).length === 0 && moves.length === 0)
      this.#complain([], 'says nothing: expected from, initial or moves');
    const found: Problem[] = [];
    const start = from === undefined ? null : startOf(from, this.#around.folder, found);
    for (const p of found) this.#complain(['from', ...p.path.slice(1)], p.message);
    const made: Procedure = {
      name: this.#name,
      start,
      tanks: Object.entries(initial).flatMap(([name, holds]) => this.#tank(name, holds)),
      trains: Object.entries(initial).flatMap(([name, holds]) => this.#train(name, holds)),
      moves: moves.flatMap((m, i) => this.#move(m, i)),
    };
    for (const name of Object.keys(initial)) this.#known(name);
    this.#needs(made);
    return made;
  }

  #complain(at: Path, message: string, atKey = false): void {
    this.#problems.push({ path: ['procedures', this.#name, ...at], message, atKey });
  }

  #known(name: string): void {
    const names = [...this.#s.tanks.map((t) => t.name), ...this.#s.trains.map((t) => t.name)];
    if (!names.includes(name))
      this.#complain(['initial', name], `unknown tank or train ${show(name)}${hint(name, names)}`, true);
  }

  #tank(name: string, holds: Holds): Procedure['tanks'][number][] {
    const tank = this.#s.tanks.findIndex((t) => t.name === name);
    if (tank < 0) return [];
    const t = this.#s.tanks[tank];
    for (const key of ['aqueous', 'organic'] as const)
      if (holds[key] !== undefined)
        this.#complain(
          ['initial', name, key],
          'is for trains; a tank states its concentrations themselves; take it out',
          true,
        );
    const filled = holds.filled as Figure | undefined;
    const held =
      filled === undefined ? null : filled.kind === 'a percentage' ? filled.value * t.volume : filled.value;
    if (held !== null && held > t.volume)
      this.#complain(
        ['initial', name, 'filled'],
        `a tank cannot hold more than its volume, got ${show(filled?.text)}; fill it less`,
      );
    const { components } = this.#around.basis;
    const stated = components.some((c) => holds[c] !== undefined);
    return [{ tank, held, content: stated ? this.#content(holds, t.phase, ['initial', name]) : null }];
  }

  #train(name: string, holds: Holds): Procedure['trains'][number][] {
    const train = this.#s.trains.findIndex((t) => t.name === name);
    if (train < 0) return [];
    for (const key of ['filled', ...this.#around.basis.components])
      if (holds[key] !== undefined)
        this.#complain(
          ['initial', name, key],
          `is for tanks; a train states its aqueous and its organic; take it out`,
          true,
        );
    const initial: { -readonly [K in keyof Initial]?: Initial[K] } = {};
    for (const phase of ['aqueous', 'organic'] as const) {
      const given = holds[phase];
      if (given === undefined) continue;
      initial[phase] =
        given === 'as entering'
          ? 'as entering'
          : this.#content(given as Holds, phase, ['initial', name, phase]);
    }
    return [{ train, initial }];
  }

  #content(given: Readonly<Record<string, unknown>>, phase: Phase, at: Path): number[] {
    if (phase === 'organic')
      for (const n of this.#s.species)
        if (given[n] !== undefined)
          this.#complain(
            [...at, n],
            `the species '${n}' stays in the aqueous; an organic has none; take it out`,
            true,
          );
    return content(given, phase, this.#around.basis, ['procedures', this.#name, ...at], this.#problems);
  }

  #move(m: NonNullable<RawProcedure['moves']>[number], i: number): Procedure['moves'][number][] {
    const { outline, basis, contents, feeds, folder } = this.#around;
    const path = ['procedures', this.#name, 'moves', i];
    checkOwner(m, path, this.#s.loops ?? [], this.#problems);
    // A procedure may last as long as it needs: the horizon follows it.
    const horizon = { kind: 'a time', value: Number.POSITIVE_INFINITY, text: '' } as const;
    const at: Figure = m.at ?? { kind: 'a time', value: 0, text: '0 h' };
    return readChange(
      { ...m, at },
      {
        path,
        outline,
        basis,
        contents,
        shares: removalShares(this.#s.tanks, this.#s.solutes),
        feeds,
        horizon,
        folder,
      },
      this.#problems,
    );
  }

  /** What is asked of upsets is asked of moves. */
  #needs(p: Procedure): void {
    const before: Problem[] = [];
    const found: Problem[] = [];
    checkNeeds(this.#s, before);
    checkNeeds({ ...this.#s, start: p.start ?? this.#s.start, upsets: p.moves }, found);
    for (const q of found) {
      if (before.some((b) => b.message === q.message)) continue;
      this.#complain(q.path[0] === 'upsets' ? ['moves'] : q.path[0] === 'start' ? ['from'] : [], q.message);
    }
  }
}

/** What a tank (its concentrations, how far it is filled) or a train (its phases) is said to hold. */
type Holds = Readonly<Record<string, unknown>>;
