import { hint } from './nearest.ts';
import { plainTrain } from './plain.ts';
import type { Problem } from './refusal.ts';
import type {
  Arrangement,
  Blend,
  Branch,
  Draw,
  Path,
  Removal,
  Split,
  Take,
  Tank,
  Train,
} from './scenario.ts';
import type { RawScenario, RawStage } from './schema.ts';
import { show } from './show.ts';
import type { Quantity } from './units.ts';

type RawTrain = RawScenario['trains'][string];
type RawTank = NonNullable<RawScenario['tanks']>[string];

/** By how much shares that are to sum to 100 % may miss it. */
const ROUNDING = 1e-9;

const percent = (share: number): string => String(Number((100 * share).toPrecision(6)));

export const takeOf = (q: Quantity): Take =>
  q.kind === 'a percentage' ? { share: q.value } : { flow: q.value };

/** Splits: any number of branches by share or by flow, and one that takes the rest. */
export function splitsOf(raw: RawScenario, problems: Problem[]): Split[] {
  return Object.entries(raw.splits ?? {}).map(([stream, given]): Split => {
    const path = ['splits', stream];
    const names = Object.keys(given);
    const rests = names.filter((n) => given[n] === 'rest');
    if (rests.length !== 1 || names.length < 2)
      problems.push({
        path,
        message: `a split has one or more branches by share or flow, and one with the rest, such as {a: 40 %, b: rest}; got ${names.length} branches, ${rests.length} of them with the rest`,
      });
    const branches = names.flatMap((name): Branch[] => {
      const q = given[name];
      return q === 'rest' ? [] : [{ name, take: takeOf(q) }];
    });
    const shares = branches.reduce((n, b) => n + ('share' in b.take ? b.take.share : 0), 0);
    if (shares >= 1)
      problems.push({
        path,
        message: `the shares come to ${percent(shares)} %, which leaves no rest; lower them`,
      });
    return { stream, branches, rest: rests[0] ?? '' };
  });
}

export const blendsOf = (raw: RawScenario): Blend[] =>
  Object.entries(raw.blends ?? {}).map(([name, of]) => ({ name, of }));

/** Side feeds and draws of one stage. */
export function stageStreamsOf(q: RawStage | undefined): { takes: string[]; draws: Draw[] } {
  const takes = q?.takes ?? [];
  return {
    takes: typeof takes === 'string' ? [takes] : takes,
    draws: Object.entries(q?.draws ?? {}).map(([name, d]) => ({
      name,
      phase: d.phase,
      take: takeOf(d.take),
    })),
  };
}

/** How the phases pass the stages; complains where settings do not belong to the arrangement. */
export function arrangementOf(
  t: RawTrain,
  path: Path,
  problems: Problem[],
): Pick<Train, 'arrangement' | 'backFlow'> {
  const kind = t.arrangement ?? plainTrain.arrangement.kind;
  const cross = kind === 'cross-current';
  for (const key of ['fresh', 'shares'] as const)
    if (t[key] !== undefined && !cross)
      problems.push({
        path: [...path, key],
        message: `belongs to arrangement: cross-current, this one is ${kind}; take it out or state that`,
      });
  const backFlow = {
    aqueous: t.back_flow?.aqueous?.value ?? 0,
    organic: t.back_flow?.organic?.value ?? 0,
  };
  if (t.back_flow !== undefined && t.settler !== 'none')
    problems.push({
      path: [...path, 'back_flow'],
      message: 'flow back to a neighbour belongs to stages without settlers: add settler: none',
    });
  if (t.back_flow !== undefined && cross)
    problems.push({
      path: [...path, 'back_flow'],
      message: 'stages in cross-current have no neighbour to flow back to; take it out',
    });
  const arrangement: Arrangement =
    kind === 'cross-current'
      ? { kind, fresh: t.fresh ?? 'organic', shares: sharesOf(t, path, problems) }
      : { kind };
  return { arrangement, backFlow };
}

/** Shares of the fresh phase, equal where they are not stated. */
function sharesOf(t: RawTrain, path: Path, problems: Problem[]): number[] {
  const given = t.shares?.map((q) => q.value);
  if (given === undefined) return Array.from({ length: t.stages }, () => 1 / t.stages);
  const sum = given.reduce((n, v) => n + v, 0);
  const complain = (message: string): number => problems.push({ path: [...path, 'shares'], message });
  if (given.length !== t.stages)
    complain(`${given.length} shares for ${t.stages} stages; state one for each`);
  else if (Math.abs(sum - 1) > ROUNDING)
    complain(`the shares come to ${percent(sum)} %, not to 100 %; mend them`);
  return given.map((v) => v / sum);
}

/** What a tank takes out of what it holds, by solute. */
export function removalsOf(
  t: RawTank,
  { solutes, species }: { readonly solutes: readonly string[]; readonly species: readonly string[] },
  path: Path,
  problems: Problem[],
): (Removal | null)[] {
  const unknown = (key: Path, name: string, what: string, known: readonly string[]): number =>
    problems.push({
      path: [...path, ...key, name],
      message: `unknown ${what} ${show(name)}${hint(name, known)}`,
      atKey: true,
    });
  for (const name of Object.keys(t.removes ?? {}))
    if (!solutes.includes(name)) unknown(['removes'], name, 'solute', solutes);
  for (const [name, row] of Object.entries(t.returns ?? {})) {
    if (t.removes?.[name] === undefined)
      problems.push({
        path: [...path, 'removes', name],
        message: `is missing, but returns says what ${show(name)} gives back; state it, or take that out of returns`,
      });
    if (t.phase === 'organic')
      problems.push({
        path: [...path, 'returns'],
        message: 'species stay in the aqueous; an organic takes none; take it out',
      });
    for (const s of Object.keys(row))
      if (!species.includes(s)) unknown(['returns', name], s, 'species', species);
  }
  return solutes.map((name) => {
    const q = t.removes?.[name];
    if (q === undefined) return null;
    const back = t.returns?.[name];
    return {
      how: q.kind === 'a percentage' ? { share: q.value } : { rate: q.value },
      returns: back === undefined ? null : species.map((s) => back[s]?.value ?? 0),
    };
  });
}

/** Paths of the removals that are stated as shares. */
export const removalShares = (tanks: readonly Tank[], solutes: readonly string[]): ReadonlySet<string> =>
  new Set(
    tanks.flatMap((t) =>
      t.removes.flatMap((r, i) =>
        r !== null && 'share' in r.how ? [`${t.name}.removal of ${solutes[i]}`] : [],
      ),
    ),
  );

/** What a volume of a feed uses up of each species, kg/m³. */
export function neutralisedBy(
  f: RawScenario['feeds'][string],
  species: readonly string[],
  path: Path,
  problems: Problem[],
): number[] {
  const given = f.neutralises ?? {};
  if (f.neutralises !== undefined && f.phase !== 'aqueous')
    problems.push({
      path: [...path, 'neutralises'],
      message: 'species stay in the aqueous; only an aqueous feed meets them; take it out',
    });
  for (const name of Object.keys(given))
    if (!species.includes(name))
      problems.push({
        path: [...path, 'neutralises', name],
        message: `unknown species ${show(name)}${hint(name, species)}`,
        atKey: true,
      });
    else if (f[name as keyof typeof f] !== undefined)
      problems.push({
        path: [...path, 'neutralises', name],
        message: `a feed brings ${show(name)} or uses it up, not both; state one of them`,
      });
  return species.map((s) => given[s]?.value ?? 0);
}
