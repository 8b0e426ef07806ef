import { STAGE } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Mixer, Path, Phase, Settler, Stage } from './scenario.ts';
import type { RawScenario } from './schema.ts';

type RawTrain = RawScenario['trains'][string];
type RawMixer = NonNullable<RawTrain['mixer']>;
type RawSettler = NonNullable<RawTrain['settler']>;
interface Own {
  readonly mixer?: RawMixer;
  readonly settler?: RawSettler;
}

/** The stages of a train: what all have in common, and what differs in one. */
export function stagesOf(t: RawTrain, path: Path, problems: Problem[]): Stage[] {
  const own = ownSettings(t, path, problems);
  // Stages without settings of their own share one object, and one complaint; where none does there is none.
  const mixer = once(() => mixerOf(t.mixer ?? {}, [...path, 'mixer'], problems));
  const settler = once(() => settlerOf(t.settler ?? {}, [...path, 'settler'], problems));
  const common = once((): Stage => ({ mixer: mixer(), settler: settler() }));
  return Array.from({ length: t.stages }, (_, i): Stage => {
    const differs = own.get(i + 1);
    if (!differs) return common();
    const at = [...path, `stage ${i + 1}`];
    return {
      mixer: differs.mixer
        ? mixerOf(inherit(t.mixer ?? {}, differs.mixer, MIXER_ALTERNATIVES), [...at, 'mixer'], problems)
        : mixer(),
      settler: differs.settler
        ? settlerOf(
            inherit(t.settler ?? {}, differs.settler, SETTLER_ALTERNATIVES),
            [...at, 'settler'],
            problems,
          )
        : settler(),
    };
  });
}

function once<T>(make: () => T): () => T {
  let made: { readonly value: T } | undefined;
  return () => {
    made ??= { value: make() };
    return made.value;
  };
}

function ownSettings(t: RawTrain, path: Path, problems: Problem[]): Map<number, Own> {
  const own = new Map<number, Own>();
  for (const [key, value] of Object.entries(t)) {
    const digits = STAGE.exec(key)?.[1];
    if (digits === undefined || value === undefined) continue;
    const stage = Number(digits);
    const complain = (message: string): number =>
      problems.push({ path: [...path, key], message, atKey: true });
    if (stage < 1 || stage > t.stages) complain(`the train has stages 1 to ${t.stages}`);
    else if (digits !== String(stage)) complain(`write 'stage ${stage}'`);
    own.set(stage, value as Own);
  }
  return own;
}

/** Two ways to state the same thing: a stage that uses the one does not inherit the other. */
const MIXER_ALTERNATIVES = [['ka', 'stage_efficiency']] as const;
const SETTLER_ALTERNATIVES = [
  ['aqueous_depth', 'aqueous_volume'],
  ['organic_depth', 'organic_volume'],
] as const;

function inherit<T extends object>(
  base: T,
  own: T,
  alternatives: readonly (readonly [keyof T, keyof T])[],
): T {
  const inherited = { ...base };
  for (const [a, b] of alternatives) {
    if (own[a] !== undefined) delete inherited[b];
    if (own[b] !== undefined) delete inherited[a];
  }
  return { ...inherited, ...own };
}

function mixerOf(m: RawMixer, path: Path, problems: Problem[]): Mixer {
  if (m.volume === undefined)
    problems.push({ path, message: "the mixer needs its volume, such as 'volume: 42 m^3'" });
  if ((m.ka === undefined) === (m.stage_efficiency === undefined))
    problems.push({
      path,
      message: `the mixer needs one of ka (such as 0.15 1/s) and stage_efficiency (such as 94 %), got ${m.ka ? 'both' : 'neither'}`,
    });
  return {
    volume: m.volume?.value ?? Number.NaN,
    continuity: m.continuity ?? 'aqueous',
    side: m.side ?? 'aqueous',
    transfer: transferOf(m),
  };
}

function transferOf({ ka, stage_efficiency }: RawMixer): Mixer['transfer'] {
  if (ka === undefined) return { given: 'efficiency', efficiency: stage_efficiency?.value ?? Number.NaN };
  if ('kind' in ka) return { given: 'ka', ka: ka.value, fixed: false };
  return { given: 'ka', ka: ka.value.value, fixed: ka.fixed ?? false };
}

function settlerOf(q: RawSettler, path: Path, problems: Problem[]): Settler {
  const layer = (phase: Phase): number => {
    const volume = q[`${phase}_volume`]?.value;
    const depth = q[`${phase}_depth`]?.value;
    if (volume !== undefined && depth === undefined) return volume;
    if (volume === undefined && depth !== undefined && q.area) return depth * q.area.value;
    const got = volume !== undefined ? 'both' : depth !== undefined ? 'a depth without an area' : 'neither';
    problems.push({
      path,
      message: `the settler needs its ${phase} layer, either as area and ${phase}_depth or as ${phase}_volume; got ${got}`,
    });
    return Number.NaN;
  };
  return {
    aqueous: layer('aqueous'),
    organic: layer('organic'),
    parts: q.tanks_in_series ?? 1,
    area: q.area?.value ?? null,
  };
}
