import { build } from './build.ts';
import { complaints, fallback } from './complaints.ts';
import { type Parsed, parse } from './document.ts';
import { format, type Located, locate, place } from './locate.ts';
import { checkNames } from './names.ts';
import { network } from './network.ts';
import { type Outline, outline } from './outline.ts';
import { checkPaths } from './paths.ts';
import { type Problem, Refusal } from './refusal.ts';
import { overlap, salvage } from './salvage.ts';
import type { Scenario } from './scenario.ts';
import { type ScenarioSchema, scenarioSchema } from './schema.ts';

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
export function readScenario(text: string, { file, folder }: Source): ReadScenario {
  const parsed = parse(
    text
      .replace(/^\uFEFF/, '')
      .replace(/\r\n?/g, '\n')
      .normalize('NFC'),
  );
  const slips = parsed.slips.map((s) => place(parsed.lines, file, s));
  if (!('raw' in parsed)) throw new ScenarioError(inOrder(slips));
  const refuse = (problems: readonly Problem[]): ScenarioError =>
    new ScenarioError(
      inOrder([...slips, ...problems.map((p) => locate(parsed.document, parsed.lines, file, p))]),
    );
  const problems: Problem[] = [];
  const scenario = check(parsed, folder, problems);
  if (scenario === null || problems.length > 0 || slips.length > 0) throw refuse(problems);
  return { scenario, refuse: (r) => refuse(r.problems) };
}

/** By place; what an alias repeats is said once. */
function inOrder(list: readonly Located[]): Located[] {
  const seen = new Set<string>();
  return list
    .filter((l) => {
      const key = `${l.line}:${l.column} ${l.path.split('.').at(-1)} ${l.message}`;
      return !seen.has(key) && seen.add(key);
    })
    .sort((a, b) => a.line - b.line || a.column - b.column);
}

/** Plain data → scenario, from the names through the form of each setting to what settings say together. */
function check({ raw }: Parsed, folder: string, problems: Problem[]): Scenario | null {
  const plan = outline(raw);
  checkPresence(raw, problems);
  checkNames(plan, problems);
  checkStreams(plan, problems);
  checkPaths(raw, plan, problems);
  const schema = scenarioSchema(plan);
  const parsed = schema.safeParse(raw, { error: fallback });
  if (parsed.success) return build(parsed.data, plan, folder, problems);
  const { issues } = parsed.error;
  problems.push(...issues.flatMap((i) => complaints(i, schema, plan)));
  checkTheRest(schema, raw, issues, plan, folder, problems);
  return null;
}

/** Without feeds and trains there is at least a batch. */
function checkPresence(raw: object, problems: Problem[]): void {
  if ('batches' in raw) return;
  for (const key of ['feeds', 'trains'])
    if (!(key in raw)) problems.push({ path: [key], message: `is missing; expected ${key} by name` });
}

/** What settings say together, as far as the wrong ones can be left out. */
function checkTheRest(
  schema: ScenarioSchema,
  raw: object,
  issues: Parameters<typeof salvage>[2],
  plan: Outline,
  folder: string,
  problems: Problem[],
): void {
  const left = salvage(schema, raw, issues);
  if (left === null) return;
  const found: Problem[] = [];
  build(left.data, plan, folder, found);
  problems.push(...found.filter((p) => !left.removed.some((r) => overlap(p.path, r))));
}

function checkStreams(plan: Outline, problems: Problem[]): void {
  if (!plan.whole) return;
  if (plan.trains.length === 0 && plan.batches.length === 0) {
    problems.push({ path: ['trains'], message: 'a plant has at least one train' });
    return;
  }
  try {
    network(plan);
  } catch (e) {
    if (!(e instanceof Refusal)) throw e;
    problems.push(...e.problems);
  }
}
