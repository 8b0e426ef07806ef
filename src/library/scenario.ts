import { readFileSync } from 'node:fs';
import { basename, dirname } from 'node:path';
import { parse } from '../scenario/document.ts';
import { hint } from '../scenario/nearest.ts';
import { readScenario as read, ScenarioError } from '../scenario/read.ts';
import { ScenarioRefused } from './errors.ts';
import { shared } from './inside.ts';
import type { Setting } from './types.ts';

/** A checked scenario. It never changes; `with` makes another one. */
export class Scenario {
  readonly title: string;
  /** The settings as they were written, aliases and all unfolded; a copy. */
  readonly settings: Readonly<Record<string, unknown>>;
  /** Where data files of the scenario are looked for. */
  readonly folder: string;

  /** @throws ScenarioRefused with every complaint. */
  constructor(text: string, file: string, folder: string) {
    let found: ReturnType<typeof read>;
    try {
      found = read(text, { file, folder });
    } catch (e) {
      throw e instanceof ScenarioError ? refused(e) : e;
    }
    shared.set(this, { ...found, refused });
    const parsed = parse(text);
    // It was read, so it has settings; through JSON what an alias repeats stands in each place on its own.
    this.settings = 'raw' in parsed ? JSON.parse(JSON.stringify(parsed.raw)) : {};
    this.title = found.scenario.title;
    this.folder = folder;
  }

  /**
   * The scenario with some settings changed, by their keys joined with dots: `{'feeds.leach liquor.flow': '450 m^3/h'}`.
   * Items of lists go by number from 0: `upsets.0.by`; undefined takes a setting or an item out. What an alias of the file repeats changes in that place only.
   *
   * @throws ScenarioRefused with every complaint; RangeError where a path leads through something that is no setting.
   */
  with(changes: Readonly<Record<string, Setting>>): Scenario {
    const settings = structuredClone(this.settings) as Record<string, unknown>;
    for (const [path, value] of Object.entries(changes)) put(settings, path, value);
    return new Scenario(JSON.stringify(settings, null, 2), 'changed scenario', this.folder);
  }
}

/** A scenario from its text (YAML 1.2), or from settings as plain data. @throws ScenarioRefused with every complaint. */
export function readScenario(text: string | object, folder = '.'): Scenario {
  return new Scenario(typeof text === 'string' ? text : JSON.stringify(text), 'scenario', folder);
}

/** A scenario from a file; its data files lie beside it. @throws ScenarioRefused with every complaint, or from the file system. */
export const readScenarioFile = (file: string): Scenario =>
  new Scenario(readFileSync(file, 'utf8'), basename(file), dirname(file));

const refused = (e: ScenarioError): ScenarioRefused =>
  new ScenarioRefused(
    e.message,
    e.located.map(({ path, message, line, column }) => ({ path, message, line, column })),
  );

function put(root: Record<string, unknown>, path: string, value: Setting): void {
  const steps = path.split('.');
  let holder = root;
  for (const [i, step] of steps.slice(0, -1).entries()) {
    if (holder[step] === undefined && !Array.isArray(holder)) holder[step] = {};
    const next = holder[step];
    if (typeof next !== 'object' || next === null) {
      const at = steps.slice(0, i + 1).join('.');
      throw new RangeError(`${path}: ${at} holds no settings${hint(step, Object.keys(holder))}`);
    }
    holder = next as Record<string, unknown>;
  }
  const last = steps[steps.length - 1];
  if (value === undefined && Array.isArray(holder)) holder.splice(Number(last), 1);
  else if (value === undefined) delete holder[last];
  else holder[last] = value;
}
