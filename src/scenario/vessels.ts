import { stageStreamsOf } from './circuit.ts';
import { STAGE } from './outline-circuit.ts';
import {
  dropSizeNames,
  noSettler,
  plainMixer,
  plainStage,
  usualInversion,
  usualPowerNumber,
} from './plain.ts';
import type { Problem } from './refusal.ts';
import type { Mixer, Path, Phase, Settler, Stage } from './scenario.ts';
import type { RawStage as Own, RawScenario } from './schema.ts';
import { settlerFigures } from './settlers.ts';

type RawTrain = RawScenario['trains'][string];
type RawMixer = NonNullable<RawTrain['mixer']>;
type RawSettler = Exclude<NonNullable<RawTrain['settler']>, 'none'>;

/** The stages of a train: what all have in common, and what differs in one. */
export function stagesOf(t: RawTrain, path: Path, problems: Problem[]): Stage[] {
  const own = ownSettings(t, path, problems);
  // Stages without settings of their own share one object, and one complaint; where none does there is none.
  const mixer = once(() => mixerOf(t.mixer ?? {}, [...path, 'mixer'], problems));
  const shared = t.settler ?? {};
  const settler = once(() =>
    shared === 'none' ? noSettler : settlerOf(shared, [...path, 'settler'], problems),
  );
  const common = once((): Stage => ({ mixer: mixer(), settler: settler(), ...plainStage }));
  const settlerOfStage = (own: Own, at: Path): Settler => {
    if (own.settler === undefined) return settler();
    if (shared === 'none') {
      problems.push({ path: at, message: 'the stages of this train have no settlers (settler: none)' });
      return noSettler;
    }
    return settlerOf(inherit(shared, own.settler, SETTLER_ALTERNATIVES), at, problems);
  };
  return Array.from({ length: t.stages }, (_, i): Stage => {
    const differs = own.get(i + 1);
    if (!differs) return common();
    const at = [...path, `stage ${i + 1}`];
    return {
      mixer: differs.mixer
        ? mixerOf(inherit(t.mixer ?? {}, differs.mixer, MIXER_ALTERNATIVES), [...at, 'mixer'], problems)
        : mixer(),
      settler: settlerOfStage(differs, [...at, 'settler']),
      ...stageStreamsOf(differs),
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
const MIXER_ALTERNATIVES = [
  ['ka', 'stage_efficiency'],
  ['ka', 'impeller'],
  ['stage_efficiency', 'impeller'],
] as const;
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

/** A mixer as stated. Complains in place. */
export function mixerOf(m: RawMixer, path: Path, problems: Problem[]): Mixer {
  if (m.volume === undefined)
    problems.push({ path, message: "the mixer needs its volume, such as 'volume: 42 m^3'" });
  const given = [m.ka, m.stage_efficiency, m.impeller].filter((q) => q !== undefined).length;
  if (given !== 1)
    problems.push({
      path,
      message: `the mixer needs one of ka (such as 0.15 1/s), stage_efficiency (such as 94 %) and impeller, got ${given === 0 ? 'neither' : given === 2 ? 'both' : 'all'}`,
    });
  return {
    volume: m.volume?.value ?? Number.NaN,
    continuity: m.continuity ?? 'aqueous',
    side: m.side ?? 'aqueous',
    transfer: transferOf(m),
    ...plainMixer,
    pumps: m.pumps ?? plainMixer.pumps,
    inversion: inversionOf(m, path, problems),
    organicShare: m.organic_share?.value ?? plainMixer.organicShare,
    overflow: overflowOf(m),
  };
}

/** Without figures of its own a mixer is a cube with an overflow along one side. */
function overflowOf(m: RawMixer): Mixer['overflow'] {
  const side = Math.cbrt(m.volume?.value ?? 1);
  return { length: m.overflow_weir?.value ?? side, area: m.area?.value ?? side * side };
}

function inversionOf(m: RawMixer, path: Path, problems: Problem[]): Mixer['inversion'] {
  if (m.inversion === undefined || m.inversion === false) return null;
  if (m.inversion === true) return usualInversion;
  const { below, above } = m.inversion;
  if (below.value >= above.value)
    problems.push({
      path: [...path, 'inversion'],
      message: `below must be less than above, got ${below.text} and ${above.text}`,
    });
  return { low: below.value, high: above.value };
}

function transferOf({ ka, stage_efficiency, impeller, volume }: RawMixer): Mixer['transfer'] {
  if (impeller !== undefined)
    return {
      given: 'impeller',
      impeller: {
        speed: impeller.speed.value,
        diameter: impeller.diameter.value,
        vessel: impeller.vessel?.value ?? Math.cbrt((4 * (volume?.value ?? 1)) / Math.PI),
        powerNumber: impeller.power_number?.value ?? usualPowerNumber,
        drops: impeller.drops ?? dropSizeNames[0],
      },
    };
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
    ...settlerFigures(q, path, problems),
  };
}
