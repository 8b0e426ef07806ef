import { LineCounter, parseDocument } from 'yaml';
import type { z } from 'zod';
import { build } from './build.ts';
import { format, type Located, locate } from './locate.ts';
import { checkName } from './names.ts';
import { hint } from './nearest.ts';
import { network } from './network.ts';
import { type Outline, outline } from './outline.ts';
import { type Problem, Refusal } from './refusal.ts';
import type { Path, Scenario } from './scenario.ts';
import { scenarioSchema } from './schema.ts';
import { show } from './units.ts';

/** Characters of a scenario file; the largest sensible plant stays far below. */
const LONGEST = 5_000_000;
/** Complaints shown; more only hide the first. */
const MOST_SHOWN = 50;

/** A scenario file is refused: every complaint with its line. The message is ready to be shown. */
export class ScenarioError extends Error {
  override readonly name = 'ScenarioError';
  readonly located: readonly Located[];

  constructor(located: readonly Located[]) {
    const shown = located.slice(0, MOST_SHOWN).map(format);
    const more = located.length > MOST_SHOWN ? [`… and ${located.length - MOST_SHOWN} more`] : [];
    super([...shown, ...more].join('\n'));
    this.located = located;
  }
}

export interface Source {
  /** The file as the user named it. */
  readonly file: string;
  /** Folder against which data files are found. */
  readonly folder: string;
}

export interface ReadScenario {
  readonly scenario: Scenario;
  /** Turns a later refusal (the plant's) into lines of this file. */
  refuse(refusal: Refusal): ScenarioError;
}

/**
 * YAML 1.2 text → checked scenario in SI.
 *
 * @throws ScenarioError with all complaints at once.
 */
export function readScenario(text: string, source: Source): ReadScenario {
  const lines = new LineCounter();
  const at = (line: number, column: number, message: string): ScenarioError =>
    new ScenarioError([{ file: source.file, line, column, path: '', message }]);
  if (text.trim() === '')
    throw at(1, 1, 'the file is empty; a scenario needs at least title, solutes, feeds, trains, horizon');
  if (text.length > LONGEST) throw at(1, 1, `the file has ${text.length} characters, more than ${LONGEST}`);
  const doc = parseDocument(text, {
    lineCounter: lines,
    prettyErrors: false,
    version: '1.2',
    uniqueKeys: true,
  });
  if (doc.errors.length > 0)
    throw new ScenarioError(
      doc.errors.map((e) => {
        const p = lines.linePos(e.pos[0]);
        return {
          file: source.file,
          line: Math.max(1, p.line),
          column: Math.max(1, p.col),
          path: '',
          message: `not YAML: ${e.message}`,
        };
      }),
    );
  let raw: unknown;
  try {
    raw = doc.toJS({ maxAliasCount: 100 });
  } catch (e) {
    throw at(1, 1, `not usable YAML: ${(e as Error).message}`);
  }
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw))
    throw at(1, 1, `expected settings by name (title: …), got ${show(raw)}`);

  const where = (problems: readonly Problem[]): ScenarioError =>
    new ScenarioError(
      distinct(problems.map((p) => locate(doc, lines, source.file, p))).sort(
        (a, b) => a.line - b.line || a.column - b.column,
      ),
    );
  const problems: Problem[] = [];
  const plan = outline(raw);
  checkNames(plan, problems);
  const schema = scenarioSchema(plan.solutes, plan.species, stageKeys(raw));
  const parsed = schema.safeParse(raw);
  if (!parsed.success) problems.push(...parsed.error.issues.flatMap((i) => complaints(i, schema)));
  checkPaths(raw as Record<string, unknown>, plan, problems);
  checkStreams(plan, problems);
  if (!parsed.success) throw where(problems);
  const scenario = build(parsed.data, plan, source.folder, problems);
  if (problems.length > 0) throw where(problems);
  return { scenario, refuse: (r) => where(r.problems) };
}

function distinct(list: readonly Located[]): Located[] {
  const seen = new Set<string>();
  return list.filter((l) => {
    const key = `${l.line}:${l.column}:${l.message}`;
    return !seen.has(key) && seen.add(key);
  });
}

function checkNames(plan: Outline, problems: Problem[]): void {
  plan.solutes.forEach((n, i) => {
    checkName(n, ['solutes', i], problems, true);
  });
  plan.species.forEach((n, i) => {
    checkName(n, ['species', i], problems, true);
  });
  const all = [...plan.solutes, ...plan.species];
  all.forEach((n, i) => {
    if (all.indexOf(n) === i) return;
    const path = i < plan.solutes.length ? ['solutes', i] : ['species', i - plan.solutes.length];
    problems.push({ path, message: `'${n}' is named twice` });
  });
  for (const f of plan.feeds) checkName(f.name, ['feeds', f.name], problems);
  for (const t of plan.tanks) {
    checkName(t.name, ['tanks', t.name], problems);
    checkName(t.to, ['tanks', t.name, 'to'], problems);
  }
  for (const t of plan.trains) {
    checkName(t.name, ['trains', t.name], problems);
    checkName(t.aqueous.to, ['trains', t.name, 'aqueous'], problems);
    checkName(t.organic.to, ['trains', t.name, 'organic'], problems);
  }
  // Paths start with a name, so a tank or train must not share one with a stream that is not its own.
  const streams = new Set([
    ...plan.feeds.map((f) => f.name),
    ...plan.trains.flatMap((t) => [t.aqueous.to, t.organic.to]),
    ...plan.tanks.map((t) => t.to),
  ]);
  for (const t of plan.tanks)
    if (streams.has(t.name))
      problems.push({
        path: ['tanks', t.name],
        message: `'${t.name}' is also a stream; give the tank another name`,
        atKey: true,
      });
  for (const t of plan.trains)
    if (streams.has(t.name) || plan.tanks.some((k) => k.name === t.name))
      problems.push({
        path: ['trains', t.name],
        message: `'${t.name}' is also a stream or a tank; give the train another name`,
        atKey: true,
      });
}

/** Paths in upsets and limits must lead somewhere. */
function checkPaths(raw: Record<string, unknown>, plan: Outline, problems: Problem[]): void {
  const check = (list: unknown, name: string, key: string, known: ReadonlyMap<string, unknown>): void => {
    if (!Array.isArray(list)) return;
    list.forEach((item, i) => {
      const value = (item as Record<string, unknown> | null)?.[key];
      if (typeof value !== 'string' || known.has(value)) return;
      problems.push({
        path: [name, i, key],
        message: `unknown quantity '${value}'${hint(value, [...known.keys()])}`,
      });
    });
  };
  if (!plan.whole) return;
  check(raw.upsets, 'upsets', 'change', plan.changeable);
  check(raw.limits, 'limits', 'keep', plan.limitable);
}

function checkStreams(plan: Outline, problems: Problem[]): void {
  if (!plan.whole) return;
  try {
    network(plan);
  } catch (e) {
    if (!(e instanceof Refusal)) throw e;
    problems.push(...e.problems);
  }
}

function stageKeys(raw: unknown): string[] {
  const trains = (raw as { trains?: unknown }).trains;
  if (typeof trains !== 'object' || trains === null) return [];
  const keys = Object.values(trains).flatMap((t) =>
    typeof t === 'object' && t !== null ? Object.keys(t) : [],
  );
  return [...new Set(keys.filter((k) => /^stage \d+$/.test(k)))];
}

type Issue = z.core.$ZodIssue;

/** A schema's complaint in our words; unknown keys one by one with the nearest known one. */
function complaints(issue: Issue, schema: z.ZodType): Problem[] {
  const path = issue.path as Path;
  if (issue.code === 'unrecognized_keys') {
    const known = keysAt(schema, path);
    return issue.keys.map((k) => ({
      path: [...path, k],
      message: `unknown key '${k}'${hint(k, known)}`,
      atKey: true,
    }));
  }
  if (issue.code === 'invalid_union') {
    // The branch that got furthest knows best what is wrong.
    const branches = issue.errors.filter((b) =>
      b.some((i) => i.code === 'custom' || i.code === 'unrecognized_keys' || i.path.length > 0),
    );
    if (branches.length > 0)
      return branches[0].flatMap((i) => complaints({ ...i, path: [...path, ...i.path] } as Issue, schema));
  }
  return [{ path, message: issue.message }];
}

/** The keys that a schema knows at a path. */
function keysAt(schema: z.ZodType, path: Path): string[] {
  let options: unknown[] = [schema];
  const open = (s: unknown): unknown[] => {
    const def = (s as { def?: Record<string, unknown> }).def;
    if (!def) return [];
    if (def.type === 'optional' || def.type === 'default' || def.type === 'nullable')
      return open(def.innerType);
    if (def.type === 'union') return (def.options as unknown[]).flatMap(open);
    if (def.type === 'pipe') return open(def.in);
    return [s];
  };
  for (const step of path) {
    options = options.flatMap(open).flatMap((s) => {
      const def = (s as { def: Record<string, unknown> }).def;
      if (def.type === 'object') return (def.shape as Record<string, unknown>)[step] ?? [];
      if (def.type === 'record') return def.valueType ?? [];
      if (def.type === 'array') return def.element ?? [];
      return [];
    });
  }
  return options.flatMap(open).flatMap((s) => {
    const def = (s as { def: Record<string, unknown> }).def;
    return def.type === 'object' ? Object.keys(def.shape as object) : [];
  });
}
