import type { Issue } from './complaints.ts';
import type { Path } from './scenario.ts';
import type { RawScenario, ScenarioSchema } from './schema.ts';

/** What of a wrong file can still be judged, and which parts of it were taken out for that. */
export interface Salvage {
  readonly data: RawScenario;
  readonly removed: readonly Path[];
}

type Settings = Record<string, unknown>;

/** Settings that a scenario cannot be without, in a form that no later check complains about. */
const STAND_INS: Settings = { title: '-', horizon: '1 s', feeds: {}, trains: {} };
/** Items of lists keep their places, since paths count them: these name no quantity, so nothing reads them. */
const ITEMS: Settings = {
  upsets: { at: '0 s', change: '-', by: '0 %' },
  limits: { keep: '-', below: '1 g/L' },
};
/** What other figures are converted with: without it they would be complained about in its stead. */
const FACTORS: Settings = { densities: '1 kg/m^3', molar_masses: '1 g/mol' };
/** Each round takes out what the one before left incomplete, a level further up; the deepest setting lies at eight. */
const ROUNDS = 10;

/**
 * Takes out all that the schema complains about, so that what is left can be checked for sense in the same pass:
 * a wrong unit in one feed must not hide a wrong isotherm in a train. Null where nothing sensible is left.
 */
export function salvage(schema: ScenarioSchema, raw: object, issues: readonly Issue[]): Salvage | null {
  const rest = structuredClone(raw) as Settings;
  const removed: Path[] = [];
  let wrong = issues;
  for (let round = 0; round < ROUNDS; round++) {
    // All are looked up before any is taken out: one and the same feed may be wrong in two ways.
    const edits = wrong.flatMap((issue) => editsFor(issue, rest));
    for (const { at, value } of edits) put(rest, at, value);
    removed.push(...edits.map((e) => e.at));
    const parsed = schema.safeParse(rest);
    if (parsed.success) {
      const { data } = parsed;
      if (!removed.some((p) => p[0] === 'horizon')) return { data, removed };
      return { data: { ...data, horizon: { ...data.horizon, value: Number.NaN } }, removed };
    }
    wrong = parsed.error.issues;
  }
  return null;
}

interface Edit {
  readonly at: Path;
  /** Undefined: what is there is taken out. */
  readonly value: unknown;
}

function editsFor(issue: Issue, rest: Settings): Edit[] {
  const path = issue.path as Path;
  if (issue.code !== 'unrecognized_keys') return [edit(path, rest)];
  return issue.keys.map((k) => (isItem(path) ? edit(path, rest) : { at: [...path, k], value: undefined }));
}

function edit(path: Path, rest: Settings): Edit {
  const [first, second] = path;
  if (path.length === 1 && Object.hasOwn(STAND_INS, first)) return { at: path, value: STAND_INS[first] };
  if (path.length === 2 && Object.hasOwn(FACTORS, first)) return { at: path, value: FACTORS[first] };
  if (path.at(-2) === 'constants') return { at: path, value: 1 };
  if (isItem(path)) return { at: [first, second], value: ITEMS[first] };
  return { at: present(path, rest), value: undefined };
}

const isItem = ([first, second]: Path): boolean => typeof second === 'number' && Object.hasOwn(ITEMS, first);

/** The longest part of a path that is there: what lacks a setting goes whole, and so does a list with a wrong item. */
function present(path: Path, root: Settings): Path {
  let value: unknown = root;
  const isThere = (step: string | number): boolean =>
    typeof value === 'object' && value !== null && !Array.isArray(value) && Object.hasOwn(value, step);
  for (const [i, step] of path.entries()) {
    if (!isThere(step)) return path.slice(0, i);
    value = (value as Settings)[step];
  }
  return path;
}

function put(root: Settings, path: Path, value: unknown): void {
  let holder: unknown = root;
  for (const step of path.slice(0, -1)) holder = (holder as Settings | undefined)?.[step];
  const last = path.at(-1);
  if (typeof holder !== 'object' || holder === null || last === undefined) return;
  if (value === undefined) delete (holder as Settings)[last];
  else (holder as Settings)[last] = value;
}

/** Whether one path lies on the way to the other: then a complaint about the one may only echo the other. */
export const overlap = (a: Path, b: Path): boolean => a.slice(0, b.length).every((step, i) => step === b[i]);
