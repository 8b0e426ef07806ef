import { inTarget, kindsOf, readChange } from './changes.ts';
import { type Basis, carrierFlow, content } from './content.ts';
import { readLaw } from './laws.ts';
import { hint } from './nearest.ts';
import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
import type {
  Feed,
  Initial,
  Law,
  Limit,
  Mixer,
  Path,
  Phase,
  Scenario,
  Settler,
  Stage,
  Tank,
  Train,
} from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { quantity } from './units.ts';

/** Records and vessels beyond which a run would fill the memory, whatever the machine. */
const MOST_RECORDS = 2e6;
const MOST_PLACES = 400_000;
const MOST_VALUES = 4e8;
/** Records of a run that says nothing about them. */
const USUAL_RECORDS = 300;

/** Checked raw data → scenario in SI. Every complaint goes to `problems`; the result counts only without any. */
export function build(raw: RawScenario, outline: Outline, folder: string, problems: Problem[]): Scenario {
  const solutes = raw.solutes;
  const species = raw.species ?? [];
  const components = [...solutes, ...species];
  const basis: Basis = {
    components,
    densities: Object.fromEntries(Object.entries(raw.densities ?? {}).map(([k, q]) => [k, q?.value])),
    molarMasses: Object.fromEntries(Object.entries(raw.molar_masses ?? {}).map(([k, q]) => [k, q.value])),
  };
  for (const name of Object.keys(basis.molarMasses))
    if (!components.includes(name))
      problems.push({
        path: ['molar_masses', name],
        message: `unknown solute or species '${name}'${hint(name, components)}`,
        atKey: true,
      });
  const speciesInOrganic = (given: Readonly<Record<string, unknown>>, path: Path): void => {
    for (const s of species)
      if (given[s] !== undefined)
        problems.push({
          path: [...path, s],
          message: `the species '${s}' stays in the aqueous; an organic has none`,
          atKey: true,
        });
  };

  const feeds = Object.entries(raw.feeds).map(([name, f]): Feed => {
    const path = ['feeds', name];
    if (f.phase === 'organic') speciesInOrganic(f, path);
    const c = content(f, f.phase, basis, path, problems);
    return {
      name,
      phase: f.phase,
      flow: carrierFlow(f.flow, f.phase, c, basis, [...path, 'flow'], problems),
      content: c,
    };
  });
  const tanks = Object.entries(raw.tanks ?? {}).map(([name, t]): Tank => {
    const path = ['tanks', name];
    if (t.phase === 'organic') speciesInOrganic(t, path);
    const c = content(t, t.phase, basis, path, problems);
    const volume = t.volume.value;
    const held =
      t.filled === undefined
        ? volume
        : t.filled.kind === 'a percentage'
          ? t.filled.value * volume
          : t.filled.value;
    if (held > volume)
      problems.push({ path: [...path, 'filled'], message: 'a tank cannot hold more than its volume' });
    const flow =
      t.flow === undefined ? null : carrierFlow(t.flow, t.phase, c, basis, [...path, 'flow'], problems);
    return {
      name,
      phase: t.phase,
      from: t.from,
      to: t.to,
      volume,
      held,
      flow,
      content: c,
      makeUp: null,
      passes: 0,
    };
  });

  const releases: (number | null)[][] = solutes.map(() => species.map(() => null));
  const trains = Object.entries(raw.trains).map(([name, t]): Train => {
    const path = ['trains', name];
    const equilibrium: (Law | null)[] = solutes.map(() => null);
    for (const [solute, law] of Object.entries(t.equilibrium ?? {})) {
      const at = [...path, 'equilibrium', solute];
      const i = solutes.indexOf(solute);
      if (i < 0) {
        problems.push({
          path: at,
          message: `unknown solute '${solute}'${hint(solute, solutes)}`,
          atKey: true,
        });
        continue;
      }
      equilibrium[i] = readLaw(law, solute, { solutes, species, basis, folder }, at, problems);
      if ('releases' in law)
        collectReleases(law.releases, i, species, releases, [...at, 'releases'], problems);
    }
    return {
      name,
      aqueous: t.aqueous,
      organic: t.organic,
      stages: stagesOf(t, path, problems),
      equilibrium,
      hydraulics: 'full',
      recycle: null,
      initial: initialOf(t.initial, basis, speciesInOrganic, [...path, 'initial'], problems),
    };
  });

  const horizon = raw.horizon.value;
  const recordEvery = raw.record_every?.value ?? horizon / USUAL_RECORDS;
  const scenario: Scenario = {
    title: raw.title,
    about: raw.about ?? '',
    solutes,
    species,
    feeds,
    tanks,
    trains,
    releases: releases.map((row) => row.map((r) => r ?? 0)),
    start: raw.start ?? 'barren',
    properties: {
      density: { aqueous: null, organic: null },
      viscosity: { aqueous: null, organic: null },
      tension: null,
      diffusivity: solutes.map(() => null),
    },
    horizon,
    recordEvery,
    upsets: (raw.upsets ?? []).flatMap(
      (u, i) => readChange(u, ['upsets', i], outline, basis, folder, problems) ?? [],
    ),
    limits: (raw.limits ?? []).flatMap((l, i) => readLimit(l, ['limits', i], outline, basis, problems) ?? []),
  };
  checkSize(scenario, problems);
  return scenario;
}

function collectReleases(
  given: Readonly<Record<string, { value: number }>> | undefined,
  solute: number,
  species: readonly string[],
  releases: (number | null)[][],
  path: Path,
  problems: Problem[],
): void {
  for (const [name, q] of Object.entries(given ?? {})) {
    const k = species.indexOf(name);
    if (k < 0)
      problems.push({
        path: [...path, name],
        message: `unknown species '${name}'${hint(name, species)}`,
        atKey: true,
      });
    else if (releases[solute][k] !== null && releases[solute][k] !== q.value)
      problems.push({
        path: [...path, name],
        message: `another train states ${releases[solute][k]}; what a solute releases is the same everywhere`,
      });
    else releases[solute][k] = q.value;
  }
}

type RawTrain = RawScenario['trains'][string];
type RawMixer = NonNullable<RawTrain['mixer']>;
type RawSettler = NonNullable<RawTrain['settler']>;

function stagesOf(t: RawTrain, path: Path, problems: Problem[]): Stage[] {
  const differs = new Map<number, { mixer?: RawMixer; settler?: RawSettler }>();
  for (const [key, value] of Object.entries(t)) {
    const j = /^stage (\d+)$/.exec(key)?.[1];
    if (j === undefined || value === undefined) continue;
    if (Number(j) < 1 || Number(j) > t.stages)
      problems.push({ path: [...path, key], message: `the train has stages 1 to ${t.stages}`, atKey: true });
    differs.set(Number(j), value as { mixer?: RawMixer; settler?: RawSettler });
  }
  // All stages without a setting of their own share one object, and one complaint.
  const common = {
    mixer: mixerOf(t.mixer ?? {}, [...path, 'mixer'], problems),
    settler: settlerOf(t.settler ?? {}, [...path, 'settler'], problems),
  };
  return Array.from({ length: t.stages }, (_, i): Stage => {
    const own = differs.get(i + 1);
    if (!own) return common;
    const at = [...path, `stage ${i + 1}`];
    const base = t.mixer ?? {};
    // A stage that states its own rate does not inherit the efficiency, and the other way round.
    const inherited = own.mixer?.ka
      ? { ...base, stage_efficiency: undefined }
      : own.mixer?.stage_efficiency
        ? { ...base, ka: undefined }
        : base;
    return {
      mixer: mixerOf({ ...inherited, ...own.mixer }, [...at, 'mixer'], own.mixer ? problems : []),
      settler: settlerOf({ ...t.settler, ...own.settler }, [...at, 'settler'], own.settler ? problems : []),
    };
  });
}

function mixerOf(m: RawMixer, path: Path, problems: Problem[]): Mixer {
  if (m.volume === undefined)
    problems.push({ path, message: "the mixer needs its volume, such as 'volume: 42 m^3'" });
  if ((m.ka === undefined) === (m.stage_efficiency === undefined))
    problems.push({
      path,
      message: 'the mixer needs one of ka (such as 0.15 1/s) and stage_efficiency (such as 94 %)',
    });
  const ka =
    m.ka === undefined ? null : 'fixed' in m.ka || !('kind' in m.ka) ? m.ka : { value: m.ka, fixed: false };
  return {
    volume: m.volume?.value ?? Number.NaN,
    continuity: m.continuity ?? 'aqueous',
    side: m.side ?? 'aqueous',
    pumps: false,
    inversion: null,
    overflow: { length: 1, area: 1 },
    transfer: ka
      ? {
          given: 'ka',
          ka: (ka.value as { value: number }).value,
          fixed: (ka as { fixed?: boolean }).fixed ?? false,
        }
      : { given: 'efficiency', efficiency: m.stage_efficiency?.value ?? Number.NaN },
  };
}

function settlerOf(q: RawSettler, path: Path, problems: Problem[]): Settler {
  const layer = (phase: Phase): number => {
    const volume = q[`${phase}_volume`]?.value;
    const depth = q[`${phase}_depth`]?.value;
    if (volume !== undefined && depth === undefined) return volume;
    if (volume === undefined && depth !== undefined && q.area) return depth * q.area.value;
    problems.push({
      path,
      message: `the settler needs its ${phase} layer, either as area and ${phase}_depth or as ${phase}_volume`,
    });
    return Number.NaN;
  };
  return {
    aqueous: layer('aqueous'),
    organic: layer('organic'),
    parts: q.tanks_in_series ?? 1,
    area: q.area?.value ?? null,
    shortCircuit: 0,
    band: null,
    carry: null,
    weirs: null,
  };
}

function initialOf(
  raw: RawTrain['initial'],
  basis: Basis,
  speciesInOrganic: (given: Readonly<Record<string, unknown>>, path: Path) => void,
  path: Path,
  problems: Problem[],
): Initial {
  const of = (phase: Phase): 'as entering' | number[] | null => {
    const given = raw?.[phase];
    if (given === undefined || given === 'as entering') return given ?? null;
    if (phase === 'organic') speciesInOrganic(given, [...path, phase]);
    return content(given, phase, basis, [...path, phase], problems);
  };
  return { aqueous: of('aqueous') ?? 'barren', organic: of('organic') ?? 'as entering' };
}

function readLimit(
  raw: NonNullable<RawScenario['limits']>[number],
  path: Path,
  outline: Outline,
  basis: Basis,
  problems: Problem[],
): Limit | null {
  const target = outline.limitable.get(raw.keep);
  if (!target) return null;
  const sides = (['below', 'above'] as const).filter((s) => raw[s] !== undefined);
  if (sides.length !== 1) {
    problems.push({
      path,
      message: `expected one of below and above, got ${sides.length === 0 ? 'none' : 'both'}`,
    });
    return null;
  }
  const q =
    target.what === 'volume'
      ? quantity(raw[sides[0]], 'a volume')
      : quantity(raw[sides[0]], ...kindsOf(target));
  const at = [...path, sides[0]];
  if ('wrong' in q) {
    problems.push({ path: at, message: q.wrong });
    return null;
  }
  if (q.value < 0) problems.push({ path: at, message: 'must not be negative' });
  const dot = raw.keep.indexOf('.');
  return {
    stream: raw.keep.slice(0, dot),
    quantity: raw.keep.slice(dot + 1),
    side: sides[0],
    value: target.what === 'volume' ? q.value : inTarget(q, target, basis, at, problems),
  };
}

function checkSize(s: Scenario, problems: Problem[]): void {
  const records = s.horizon / s.recordEvery;
  const perStage = (t: Train): number => t.stages.reduce((n, q) => n + 1 + q.settler.parts, 0);
  const places = s.trains.reduce((n, t) => n + perStage(t) * (2 * s.solutes.length + s.species.length), 0);
  const path = ['record_every'];
  if (records > MOST_RECORDS)
    problems.push({
      path,
      message: `${records.toPrecision(3)} records are too many (at most ${MOST_RECORDS}); record less often or shorten the horizon`,
    });
  else if (places > MOST_PLACES)
    problems.push({
      path: ['trains'],
      message: `${places} concentrations are too many (at most ${MOST_PLACES})`,
    });
  else if (records * places > MOST_VALUES)
    problems.push({
      path,
      message: `${records.toPrecision(3)} records of ${places} concentrations are too many values; record less often`,
    });
}
