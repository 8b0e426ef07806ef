import type { Plant } from '../../src/plant/assemble.ts';
import {
  noProperties,
  plainCircuit,
  plainMixer,
  plainSettler,
  plainStage,
  plainTrain,
} from '../../src/scenario/plain.ts';
import type { Change, Law, Limit, Phase, Scenario, Transfer } from '../../src/scenario/scenario.ts';
import type { F } from '../../src/solve/system.ts';
import type { RunResult } from '../../src/study/result.ts';
import { type RunSettings, run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';

/** One counter-current train: flows in m³/s, concentrations in kg/m³, volumes in m³. */
export interface Cascade {
  readonly stages: number;
  readonly aqueous: number;
  readonly organic: number;
  readonly feed: number;
  readonly solvent?: number;
  readonly law: Law | null;
  readonly transfer: Transfer;
  readonly side?: Phase;
  readonly mixer?: number;
  readonly layers?: { readonly aqueous: number; readonly organic: number };
  readonly parts?: number;
  readonly horizon?: number;
  readonly recordEvery?: number;
  readonly upsets?: readonly Change[];
  readonly limits?: readonly Limit[];
}

/** Streams feed → raffinate and solvent → extract; one solute `s`; a minute in each vessel unless told otherwise. */
export function cascade(c: Cascade): Scenario {
  const horizon = c.horizon ?? 3600;
  const stage = {
    mixer: {
      volume: c.mixer ?? 60 * (c.aqueous + c.organic),
      continuity: 'organic',
      side: c.side ?? 'aqueous',
      transfer: c.transfer,
      ...plainMixer,
    },
    settler: {
      ...(c.layers ?? { aqueous: 60 * c.aqueous, organic: 60 * c.organic }),
      parts: c.parts ?? 1,
      area: null,
      ...plainSettler,
    },
    ...plainStage,
  } as const;
  return {
    title: 'cascade',
    about: '',
    solutes: ['s'],
    species: [],
    feeds: [
      { name: 'feed', phase: 'aqueous', flow: c.aqueous, content: [c.feed] },
      { name: 'solvent', phase: 'organic', flow: c.organic, content: [c.solvent ?? 0] },
    ],
    tanks: [],
    ...plainCircuit,
    trains: [
      {
        name: 'train',
        aqueous: { from: 'feed', to: 'raffinate' },
        organic: { from: 'solvent', to: 'extract' },
        stages: Array.from({ length: c.stages }, () => stage),
        equilibrium: [c.law],
        initial: { aqueous: 'barren', organic: 'as entering' },
        ...plainTrain,
      },
    ],
    releases: [[]],
    start: 'barren',
    properties: noProperties(1),
    horizon,
    recordEvery: c.recordEvery ?? horizon,
    upsets: c.upsets ?? [],
    limits: c.limits ?? [],
  };
}

/** K·a for n = K·a·V/Q overall transfer units a stage, in a mixer of a minute of both flows. */
export const unitsOfTransfer = (n: number, aqueous: number, organic: number): Transfer => ({
  given: 'ka',
  ka: (n * aqueous) / (60 * (aqueous + organic)),
  fixed: false,
});

/** Stages as good as ideal: what is missing to equilibrium is a hundred-millionth of what enters. */
export const ideal = (aqueous: number, organic: number): Transfer => unitsOfTransfer(1e8, aqueous, organic);

/** Reads an output by its path. */
export function reader(plant: Plant): (y: F, path: string) => number {
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  return (y, path) => {
    const i = at.get(path);
    if (i === undefined) throw new Error(`no output ${path}`);
    return y[i];
  };
}

/** Aqueous concentrations stage by stage, at steady state. */
export function steadyProfile(s: Scenario, train = 'train', solute = 's'): number[] {
  const { plant, outputs } = steady(s);
  const read = reader(plant);
  const { stages } = s.trains.find((t) => t.name === train) as { stages: readonly unknown[] };
  return stages.map((_, j) => read(outputs, `${train}.${j + 1}.settler.aqueous.${solute}`));
}

/** A run to its horizon, and its last outputs by path. */
export function runToEnd(
  s: Scenario,
  settings: RunSettings,
): { result: RunResult; end: (path: string) => number } {
  const result = run(s, settings);
  const read = reader(result.plant);
  const last = result.records.rows[result.records.rows.length - 1];
  return { result, end: (path) => read(last, path) };
}

/** The same vessels cross-current: one train a stage, each with clean solvent of its own. */
export function crossCurrent(c: Cascade): Scenario {
  const s = cascade({ ...c, stages: 1 });
  const [feed, solvent] = s.feeds;
  const [train] = s.trains;
  const each = Array.from({ length: c.stages }, (_, i) => i + 1);
  return {
    ...s,
    feeds: [feed, ...each.map((i) => ({ ...solvent, name: `solvent ${i}` }))],
    trains: each.map((i) => ({
      ...train,
      name: `train ${i}`,
      aqueous: {
        from: i === 1 ? 'feed' : `aqueous ${i - 1}`,
        to: i === c.stages ? 'raffinate' : `aqueous ${i}`,
      },
      organic: { from: `solvent ${i}`, to: `extract ${i}` },
    })),
  };
}

/** Concentration of a stream at steady state. */
export function steadyStream(s: Scenario, stream: string): number {
  const { plant, outputs } = steady(s);
  return reader(plant)(outputs, `${stream}.s`);
}
