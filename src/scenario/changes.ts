import { type Basis, carrierFlow, concentration, contentKinds } from './content.ts';
import { BadData, columnIndex, elapsed, headerUnit, numbers, readTable } from './csv.ts';
import type { Figure } from './fields.ts';
import { guess } from './nearest.ts';
import type { Outline, Target } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Change, Path } from './scenario.ts';
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
  readonly horizon: Figure;
  readonly folder: string;
}

/** One change of an input: exactly one of to, by, follow. Complains in place; null where it cannot be used. */
export function readChange(raw: RawChange, setting: Setting, problems: Problem[]): Change | null {
  const target = setting.outline.changeable.get(raw.change);
  // An unknown quantity is complained about with the paths.
  if (!target) return null;
  const reader = new ChangeReader(raw, target, setting, problems);
  reader.checkTimes();
  const given = (['to', 'by', 'follow'] as const).filter((k) => raw[k] !== undefined);
  if (given.length !== 1)
    return reader.complain(`expected exactly one of to, by, follow; got ${given.join(' and ') || 'none'}`);
  const read = target.what === 'mixer' ? reader.mixer(given[0]) : reader[given[0]]();
  return read && { ...reader.frame(), ...read };
}

type Read = Pick<Change, 'how' | 'words'> | null;

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
      this.complain(`begins at ${at.text}, but the run ends at ${horizon.text}`, 'at');
    if (over && lasts && lasts.value < over.value)
      this.complain(`lasts ${lasts.text}, less than its ramp over ${over.text}`, 'for');
  }

  mixer(given: 'to' | 'by' | 'follow'): Read {
    const { change } = this.#raw;
    const value = this.#raw[given];
    const words = ['stopped', 'running'];
    if (given !== 'to' || !words.includes(String(value))) {
      const near = typeof value === 'string' ? guess(value, words) : '';
      return this.complain(`a mixer is set to 'stopped' or 'running', got ${show(value)}${near}`, given);
    }
    return { how: { to: value === 'running' ? 1 : 0 }, words: `${change} ${value}` };
  }

  to(): Read {
    const { change, to } = this.#raw;
    const q = quantity(to, ...this.#kinds());
    if ('wrong' in q) return this.complain(q.wrong, 'to');
    if (q.value < 0) return this.complain(`must not be negative, got ${show(to)}`, 'to');
    return { how: { to: this.#inside(q, 'to') }, words: `${change} to ${to}` };
  }

  by(): Read {
    const { change, by } = this.#raw;
    const bare = String(by).trim();
    if (/^[+-]?\d*\.?\d+$/.test(bare)) {
      const unit = this.#target.what === 'flow' ? 'm^3/h' : 'g/L';
      const message = `a change by ${bare} can be read in two ways: write '${bare} %' or give a unit, such as '${bare} ${unit}'`;
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
    const { file, column, time } = this.#raw.follow as NonNullable<RawChange['follow']>;
    try {
      const t = readTable(this.#s.folder, file);
      const at = columnIndex(t, column);
      const { kind, factor } = headerUnit(t, at, ...this.#kinds());
      const times = elapsed(t, time === undefined ? 0 : columnIndex(t, time));
      const list = numbers(t, at);
      if (list.length < 2)
        throw new BadData(`${t.file}:${t.rows[0].line}: the only row; two or more make a course`);
      const low = list.findIndex((v) => v < 0);
      if (low >= 0)
        throw new BadData(`${t.file}:${t.rows[low].line}: must not be negative, got ${list[low]}`);
      const values = list.map((v) => this.#inside({ kind, value: v * factor }, 'follow', 'column'));
      const start = this.#raw.at.value;
      const how = { follow: { times: times.map((v) => v + start), values } };
      return { how, words: `${change} follows ${file}` };
    } catch (e) {
      if (e instanceof BadData) return this.complain(e.message, 'follow');
      throw e;
    }
  }

  #kinds(): Kind[] {
    return this.#target.what === 'flow' ? ['a flow by volume', 'a flow by mass'] : contentKinds;
  }

  /** In SI; beside it in the stream stands what the feed or tank holds at time zero. */
  #inside(q: Quantity, ...at: string[]): number {
    const { basis, path, contents } = this.#s;
    const { phase, component } = this.#target;
    const beside = contents.get(this.#raw.change.slice(0, this.#raw.change.lastIndexOf('.'))) ?? [];
    if (component === undefined)
      return carrierFlow(q, phase, beside, basis, [...path, ...at], this.#problems);
    const rest = beside.reduce((s, c, k) => (basis.components[k] === component ? s : s + c), 0);
    return concentration(q, component, phase, basis, [...path, ...at], this.#problems, rest);
  }
}
