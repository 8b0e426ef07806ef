import { readChange } from './changes.ts';
import { arrangementOf, blendsOf, neutralisedBy, removalShares, removalsOf, splitsOf } from './circuit.ts';
import { type Basis, carrierFlow, content } from './content.ts';
import { readLaw } from './laws.ts';
import { readLimit } from './limits.ts';
import { readClock } from './moment.ts';
import { hint } from './nearest.ts';
import { checkNeeds } from './needs.ts';
import type { Outline } from './outline.ts';
import { noProperties, plainTank, plainTrain } from './plain.ts';
import { readCommissioning } from './read-commissioning.ts';
import { withLoops } from './read-loops.ts';
import { readRehearsing } from './read-rehearsing.ts';
import type { Problem } from './refusal.ts';
import { Releases } from './releases.ts';
import { startOf } from './saved.ts';
import type {
  Batch,
  Feed,
  Initial,
  Law,
  Path,
  Phase,
  Properties,
  Recycle,
  Scenario,
  Tank,
  Train,
} from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { checkSize } from './size.ts';
import { mixerOf, stagesOf } from './vessels.ts';

/** Records of a run that says nothing about them. */
const USUAL_RECORDS = 300;

/** Checked raw data → scenario in SI. Every complaint goes to `problems`; the result counts only without any. */
export function build(raw: RawScenario, outline: Outline, folder: string, problems: Problem[]): Scenario {
  const builder = new Builder(raw, folder, problems);
  const known = Object.entries(raw.feeds).map(([name, f]) => builder.feed(name, f));
  // A feed that waits for an upset to swap it in is no stream of its own.
  const feeds = known.filter((f) => !outline.spare.has(f.name));
  const tanks = Object.entries(raw.tanks ?? {}).map(([name, t]) => builder.tank(name, t));
  const trains = Object.entries(raw.trains).map(([name, t]) => builder.train(name, t));
  const batches = Object.entries(raw.batches ?? {}).map(([name, b]) => builder.batch(name, b));
  const { basis } = builder;
  const horizon = raw.horizon.value;
  const shares = removalShares(tanks, builder.solutes);
  const contents = new Map([...known, ...tanks].map((q) => [q.name, q.content]));
  const scenario: Scenario = {
    title: raw.title,
    about: raw.about ?? '',
    solutes: builder.solutes,
    species: builder.species,
    feeds,
    tanks,
    trains,
    splits: splitsOf(raw, problems),
    blends: blendsOf(raw),
    batches,
    releases: builder.releases.table(),
    start: startOf(raw.start, folder, problems),
    properties: builder.properties(raw),
    horizon,
    recordEvery: raw.record_every?.value ?? horizon / USUAL_RECORDS,
    upsets: (raw.upsets ?? []).flatMap((u, i) =>
      readChange(
        u,
        {
          path: ['upsets', i],
          outline,
          basis,
          contents,
          shares,
          feeds: known,
          horizon: raw.horizon,
          folder,
          timeZero: raw.time_zero === undefined ? null : readClock(raw.time_zero),
        },
        problems,
      ),
    ),
    limits: (raw.limits ?? []).flatMap(
      (l, i) => readLimit(l, ['limits', i], outline, basis, raw.horizon, problems) ?? [],
    ),
  };
  checkNeeds(scenario, problems);
  checkSize(scenario, problems);
  const around = { outline, basis, folder, feeds: known, contents };
  const made = withLoops(raw, scenario, around, problems);
  return {
    ...made,
    commissioning: readCommissioning(raw, made, around, problems),
    rehearsing: readRehearsing(raw, made, around, problems),
  };
}

class Builder {
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  readonly basis: Basis;
  readonly releases: Releases;
  readonly #folder: string;
  readonly #problems: Problem[];

  constructor(raw: RawScenario, folder: string, problems: Problem[]) {
    this.solutes = raw.solutes;
    this.species = raw.species ?? [];
    this.#folder = folder;
    this.#problems = problems;
    this.releases = new Releases(this.solutes.length, this.species);
    const components = [...this.solutes, ...this.species];
    this.basis = {
      components,
      densities: Object.fromEntries(Object.entries(raw.densities ?? {}).map(([k, q]) => [k, q?.value])),
      molarMasses: Object.fromEntries(Object.entries(raw.molar_masses ?? {}).map(([k, q]) => [k, q.value])),
    };
    for (const name of Object.keys(this.basis.molarMasses))
      if (!components.includes(name))
        problems.push({
          path: ['molar_masses', name],
          message: `unknown solute or species ${show(name)}${hint(name, components)}`,
          atKey: true,
        });
  }

  feed(name: string, f: RawScenario['feeds'][string]): Feed {
    const path = ['feeds', name];
    const c = this.#content(f, f.phase, path);
    const flow = carrierFlow(f.flow, f.phase, c, this.basis, [...path, 'flow'], this.#problems);
    const used = neutralisedBy(f, this.species, path, this.#problems);
    const content = c.map((v, k) => v - (used[k - this.solutes.length] ?? 0));
    return { name, phase: f.phase, flow, content };
  }

  tank(name: string, t: NonNullable<RawScenario['tanks']>[string]): Tank {
    const path = ['tanks', name];
    const c = this.#content(t, t.phase, path);
    const volume = t.volume.value;
    const filled = t.filled ?? { kind: 'a percentage', value: 1, text: '100 %' };
    const held = filled.kind === 'a percentage' ? filled.value * volume : filled.value;
    if (held > volume)
      this.#problems.push({
        path: [...path, 'filled'],
        message: `a tank cannot hold more than its volume of ${t.volume.text}, got ${show(filled.text)}; fill it less or enlarge it`,
      });
    const flow =
      t.flow === undefined
        ? null
        : carrierFlow(t.flow, t.phase, c, this.basis, [...path, 'flow'], this.#problems);
    const passes = t.passes?.value ?? plainTank.passes;
    if (passes > 1)
      this.#problems.push({
        path: [...path, 'passes'],
        message: `must not exceed 100 %, got ${t.passes?.text}`,
      });
    const makeUp = t.make_up ?? plainTank.makeUp;
    const removes = removalsOf(t, this, path, this.#problems);
    const { phase, from, to } = t;
    return { name, phase, from, to, volume, held, flow, content: c, makeUp, passes, removes };
  }

  train(name: string, t: RawScenario['trains'][string]): Train {
    const path = ['trains', name];
    const equilibrium = this.#laws(t.equilibrium, path);
    return {
      name,
      aqueous: t.aqueous,
      organic: t.organic,
      stages: stagesOf(t, path, this.#problems),
      equilibrium,
      initial: this.#initial(t.initial, [...path, 'initial']),
      hydraulics: t.hydraulics ?? plainTrain.hydraulics,
      recycle: this.#recycle(t.recycle, [...path, 'recycle']),
      ...arrangementOf(t, path, this.#problems),
    };
  }

  batch(name: string, b: NonNullable<RawScenario['batches']>[string]): Batch {
    const path = ['batches', name];
    const mixer = mixerOf(b.mixer, [...path, 'mixer'], this.#problems);
    if (mixer.organicShare === null)
      this.#problems.push({
        path: [...path, 'mixer'],
        message: "a batch needs its organic_share, such as 'organic_share: 50 %'",
      });
    if (mixer.transfer.given === 'efficiency')
      this.#problems.push({
        path: [...path, 'mixer', 'stage_efficiency'],
        message: 'an efficiency is that of a flow through a stage; a batch takes ka or an impeller',
      });
    return {
      name,
      mixer,
      organicShare: mixer.organicShare ?? Number.NaN,
      content: {
        aqueous: this.#content(b.aqueous ?? {}, 'aqueous', [...path, 'aqueous']),
        organic: this.#content(b.organic ?? {}, 'organic', [...path, 'organic']),
      },
      equilibrium: this.#laws(b.equilibrium, path),
    };
  }

  #laws(given: RawScenario['trains'][string]['equilibrium'], path: Path): (Law | null)[] {
    const equilibrium: (Law | null)[] = this.solutes.map(() => null);
    for (const [solute, law] of Object.entries(given ?? {})) {
      const at = [...path, 'equilibrium', solute];
      const i = this.solutes.indexOf(solute);
      if (i < 0) {
        const message = `unknown solute ${show(solute)}${hint(solute, this.solutes)}`;
        this.#problems.push({ path: at, message, atKey: true });
        continue;
      }
      equilibrium[i] = readLaw(law, solute, this.#lawContext(), at, this.#problems);
      if ('releases' in law) this.releases.add(i, law.releases, [...at, 'releases'], this.#problems);
    }
    return equilibrium;
  }

  #recycle(r: RawScenario['trains'][string]['recycle'], path: Path): Recycle | null {
    if (r === undefined) return plainTrain.recycle;
    const given = (['aqueous', 'organic', 'hold'] as const).filter((k) => r[k] !== undefined);
    if (given.length !== 1) {
      this.#problems.push({
        path,
        message: `expected exactly one of aqueous, organic, hold; got ${given.join(' and ') || 'none'}`,
      });
      return null;
    }
    if (r.hold !== undefined) return { hold: r.hold.value };
    const phase = given[0] as Phase;
    const flow = r[phase];
    return flow === undefined
      ? null
      : { phase, flow: carrierFlow(flow, phase, [], this.basis, [...path, phase], this.#problems) };
  }

  /** Physical properties as stated. */
  properties(raw: RawScenario): Properties {
    for (const name of Object.keys(raw.diffusivities ?? {}))
      if (!this.solutes.includes(name))
        this.#problems.push({
          path: ['diffusivities', name],
          message: `unknown solute ${show(name)}${hint(name, this.solutes)}`,
          atKey: true,
        });
    return {
      ...noProperties(this.solutes.length),
      density: {
        aqueous: raw.densities?.aqueous?.value ?? null,
        organic: raw.densities?.organic?.value ?? null,
      },
      viscosity: {
        aqueous: raw.viscosities?.aqueous?.value ?? null,
        organic: raw.viscosities?.organic?.value ?? null,
      },
      tension: raw.interfacial_tension?.value ?? null,
      diffusivity: this.solutes.map((n) => {
        const d = raw.diffusivities?.[n];
        return d === undefined ? null : { aqueous: d.aqueous.value, organic: d.organic.value };
      }),
    };
  }

  #lawContext(): Parameters<typeof readLaw>[2] {
    return { solutes: this.solutes, species: this.species, basis: this.basis, folder: this.#folder };
  }

  #initial(raw: RawScenario['trains'][string]['initial'], path: Path): Initial {
    const of = (phase: Phase): 'as entering' | number[] | null => {
      const given = raw?.[phase];
      if (given === undefined || given === 'as entering') return given ?? null;
      return this.#content(given, phase, [...path, phase]);
    };
    return { aqueous: of('aqueous') ?? 'barren', organic: of('organic') ?? 'as entering' };
  }

  #content(given: Readonly<Record<string, unknown>>, phase: Phase, path: Path): number[] {
    if (phase === 'organic')
      for (const s of this.species)
        if (given[s] !== undefined)
          this.#problems.push({
            path: [...path, s],
            message: `the species '${s}' stays in the aqueous; an organic has none; take it out`,
            atKey: true,
          });
    return content(given, phase, this.basis, path, this.#problems);
  }
}
