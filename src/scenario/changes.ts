import { type Basis, carrierFlow, concentration, contentKinds } from './content.ts';
import { BadData } from './csv.ts';
import type { Figure } from './fields.ts';
import { readFollow } from './follow.ts';
import { guess } from './nearest.ts';
import type { Outline, Target } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Change, Feed, Path } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { type Kind, type Quantity, quantity } from './units.ts';

type RawChange = NonNullable<RawScenario['upsets']>[number];

/** What a change is judged against. */
export interface Setting {
  readonly path: Path;
  readonly outline: Outline;
  readonly basis: Basis;
  /** kg/m³ by feed or tank at time zero. */
  readonly contents: ReadonlyMap<string, readonly number[]>;
  /** All feeds, those included that wait to be swapped in. */
  readonly feeds: readonly Feed[];
  /** Removals that are stated as shares. */
  readonly shares: ReadonlySet<string>;
  readonly horizon: Figure;
  readonly folder: string;
  /** ms of the plant's clock at time zero; null or left out where it is not stated. */
  readonly timeZero?: number | null;
}

/**
 * One upset: exactly one of to, by, follow. A word or a swap can stand for several changes of inputs. Complains in
 * place; empty where it cannot be used.
 */
export function readChange(raw: RawChange, setting: Setting, problems: Problem[]): Change[] {
  const target = setting.outline.changeable.get(raw.change);
  // An unknown quantity is complained about with the paths.
  if (!target) return [];
  const reader = new ChangeReader(raw, target, setting, problems);
  reader.checkTimes();
  const given = (['to', 'by', 'follow'] as const).filter((k) => raw[k] !== undefined);
  if (given.length !== 1) {
    reader.complain(`expected exactly one of to, by, follow; got ${given.join(' and ') || 'none'}`);
    return [];
  }
  const frame = reader.frame();
  if (target.what === 'feed') return reader.swap(given[0]).map((c) => ({ ...frame, ...c }));
  const words = states(raw.change)[target.what];
  if (words) return reader.state(given[0], words).map((c) => ({ ...frame, ...c }));
  const read = reader[given[0]]();
  return read ? [{ ...frame, ...read }] : [];
}

type Read = Pick<Change, 'how' | 'words'> | null;
type Named = Pick<Change, 'quantity' | 'how' | 'words'>;
/** Inputs and their values that a word stands for. */
type States = Readonly<Record<string, Readonly<Record<string, number>>>>;

/** What can be in one of a few states, by the words for them. */
const states = (path: string): Partial<Record<Target['what'], States>> => ({
  mixer: { stopped: { [path]: 0 }, running: { [path]: 1 } },
  pump: { tripped: { [path]: 0 }, running: { [path]: 1 } },
  continuity: { aqueous: { [path]: 0 }, organic: { [path]: 1 } },
  mode: { manual: { [path]: 0 }, auto: { [path]: 1 } },
  stage: {
    bypassed: { [`${path}.aqueous bypass`]: 1, [`${path}.organic bypass`]: 1 },
    'aqueous bypassed': { [`${path}.aqueous bypass`]: 1 },
    'organic bypassed': { [`${path}.organic bypass`]: 1 },
    'in line': { [`${path}.aqueous bypass`]: 0, [`${path}.organic bypass`]: 0 },
  },
});

/** How a thing with states is called in a complaint. */
const called: Partial<Record<Target['what'], string>> = {
  mixer: 'a mixer is set to',
  pump: 'a pump is set to',
  continuity: 'the continuous phase is set to',
  stage: 'a stage is set to',
  mode: 'a loop is put in',
};

class ChangeReader {
  readonly #raw: RawChange;
  readonly #target: Target;
  readonly #s: Setting;
  readonly #problems: Problem[];

  constructor(raw: RawChange, target: Target, setting: Setting, problems: Problem[]) {
    this.#raw = raw;
    this.#target = target;
    this.#s = setting;
    this.#problems = problems;
  }

  complain(message: string, ...at: string[]): null {
    this.#problems.push({ path: [...this.#s.path, ...at], message });
    return null;
  }

  frame(): Omit<Change, 'how' | 'words'> {
    const { at, change, over } = this.#raw;
    return {
      at: at.value,
      quantity: change,
      over: over?.value ?? 0,
      lasts: this.#raw.for?.value ?? null,
    };
  }

  checkTimes(): void {
    const { at, over } = this.#raw;
    const lasts = this.#raw.for;
    const { horizon } = this.#s;
    if (at.value >= horizon.value)
      this.complain(
        `begins at ${at.text}, but the run ends at ${horizon.text}; begin earlier or lengthen the horizon`,
        'at',
      );
    if (over && lasts && lasts.value < over.value)
      this.complain(
        `lasts ${lasts.text}, less than its ramp over ${over.text}; lengthen for or shorten over`,
        'for',
      );
  }

  /** A word for a state: all inputs that it stands for. */
  state(given: 'to' | 'by' | 'follow', words: States): Named[] {
    const { change } = this.#raw;
    const value = this.#raw[given];
    const known = Object.keys(words);
    const inputs = given === 'to' && known.includes(String(value)) ? words[String(value)] : null;
    if (inputs === null) {
      const near = typeof value === 'string' ? guess(value, known) : '';
      const list = known.map((w) => `'${w}'`).join(known.length === 2 ? ' or ' : ', ');
      this.complain(`${called[this.#target.what]} ${list}, got ${show(value)}${near}`, given);
      return [];
    }
    return Object.entries(inputs).map(([quantity, to]) => ({
      quantity,
      how: { to },
      words: `${change} ${value}`,
    }));
  }

  /** Another feed in the place of this one: its flow and all that it holds. */
  swap(given: 'to' | 'by' | 'follow'): Named[] {
    const { change } = this.#raw;
    const { feeds, basis } = this.#s;
    const value = this.#raw[given];
    const other = given === 'to' ? feeds.find((f) => f.name === value) : undefined;
    if (other === undefined || other.name === change) {
      const names = feeds.map((f) => f.name).filter((n) => n !== change);
      this.complain(
        `a feed is swapped to another feed, got ${show(value)}${guess(String(value), names)}`,
        given,
      );
      return [];
    }
    if (other.phase !== this.#target.phase) {
      this.complain(
        `'${other.name}' is ${other.phase}, but '${change}' is ${this.#target.phase}; swap it to a feed of its own phase`,
        given,
      );
      return [];
    }
    const words = `${change} swapped to ${other.name}`;
    const held = other.content.slice(0, other.phase === 'aqueous' ? undefined : basis.components.length);
    return [
      { quantity: `${change}.flow`, how: { to: other.flow }, words },
      ...held.flatMap((to, k): Named[] =>
        this.#s.outline.changeable.has(`${change}.${basis.components[k]}`)
          ? [{ quantity: `${change}.${basis.components[k]}`, how: { to }, words }]
          : [],
      ),
    ];
  }

  to(): Read {
    const { change, to } = this.#raw;
    const q = quantity(to, ...this.#kinds());
    if ('wrong' in q) return this.complain(q.wrong, 'to');
    if (q.value < 0) return this.complain(`must not be negative, got ${show(to)}`, 'to');
    const most = this.#isShare() ? 1 : Infinity;
    if (q.value > most) return this.complain(`must not exceed 100 %, got ${show(to)}`, 'to');
    return { how: { to: this.#inside(q, 'to') }, words: `${change} to ${to}` };
  }

  by(): Read {
    const { change, by } = this.#raw;
    const bare = String(by).trim();
    if (/^[+-]?\d*\.?\d+$/.test(bare)) {
      const unit =
        { flow: 'm^3/h', speed: 'rpm', weir: 'cm', removal: 'kg/h' }[this.#target.what as string] ?? 'g/L';
      const message =
        this.#target.what === 'share'
          ? `a change of a share by ${bare} can be read in two ways: state the new share with to, such as '20 %', or write '${bare} %' of the share as it is`
          : `a change by ${bare} can be read in two ways: write '${bare} %' or give a unit, such as '${bare} ${unit}'`;
      return this.complain(message, 'by');
    }
    const q = quantity(by, 'a percentage', ...this.#kinds());
    if ('wrong' in q) return this.complain(q.wrong, 'by');
    const words = `${change} ${by}`;
    if (q.kind === 'a percentage') return { how: { by: q.value, relative: true }, words };
    if (q.kind === 'a mass fraction')
      return this.complain(
        `what a mass fraction adds depends on where it starts; use g/L or kg/kg, or state the new value with to, got ${show(by)}`,
        'by',
      );
    return { how: { by: this.#inside(q, 'by'), relative: false }, words };
  }

  follow(): Read {
    const { change } = this.#raw;
    const raw = this.#raw.follow as NonNullable<RawChange['follow']>;
    try {
      const data = readFollow(raw, this.#s.folder, this.#kinds(), this.#s.timeZero ?? null);
      const { kind } = data;
      const values = data.values.map((value) => this.#inside({ kind, value }, 'follow', 'column'));
      const start = raw.by_clock ? 0 : this.#raw.at.value;
      const how = { follow: { times: data.times.map((v) => v + start), values } };
      return { how, words: `${change} follows ${raw.file}` };
    } catch (e) {
      if (e instanceof BadData) return this.complain(e.message, 'follow');
      throw e;
    }
  }

  #kinds(): Kind[] {
    const { what } = this.#target;
    if (what === 'flow') return ['a flow by volume', 'a flow by mass'];
    if (what === 'speed') return ['a rate'];
    if (what === 'output') return ['a plain number'];
    if (what === 'share') return ['a percentage'];
    if (what === 'removal') return this.#isShare() ? ['a percentage'] : ['a flow by mass'];
    return what === 'weir' ? ['a length'] : contentKinds;
  }

  /** What is stated as a share of something can only change as one. */
  #isShare(): boolean {
    const { what } = this.#target;
    return what === 'share' || (what === 'removal' && this.#s.shares.has(this.#raw.change));
  }

  /** In SI; beside it in the stream stands what the feed or tank holds at time zero. */
  #inside(q: Quantity, ...at: string[]): number {
    const { basis, path, contents } = this.#s;
    const { phase, component, what } = this.#target;
    if (what === 'speed' || what === 'weir' || what === 'share' || what === 'removal' || what === 'output')
      return q.value;
    const beside = contents.get(this.#raw.change.slice(0, this.#raw.change.lastIndexOf('.'))) ?? [];
    if (component === undefined)
      return carrierFlow(q, phase, beside, basis, [...path, ...at], this.#problems);
    const rest = beside.reduce((s, c, k) => (basis.components[k] === component ? s : s + c), 0);
    return concentration(q, component, phase, basis, [...path, ...at], this.#problems, rest);
  }
}
