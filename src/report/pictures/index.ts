import type { CommissionResult } from '../../study/commission/commission.ts';
import type { RunResult, SteadyResult } from '../../study/result.ts';
import { answerLevels, answers } from './answers.ts';
import { approach } from './approach.ts';
import { draw } from './canvas.ts';
import { comparison } from './comparison.ts';
import { fan } from './fan.ts';
import { frequency } from './frequency.ts';
import { levels } from './levels.ts';
import { loopSignals } from './loop.ts';
import { stageTimeMap } from './map.ts';
import { operating } from './operating.ts';
import { outlets } from './outlets.ts';
import { type Sheet, sheetOf } from './panels.ts';
import type { Picture } from './picture.ts';
import { profiles } from './profiles.ts';
import { ranked } from './ranked.ts';
import { type Rehearsed, startSize } from './start-size.ts';
import { timeline } from './timeline.ts';

/** Pictures of `run`, in the order in which they are drawn. */
export const runTable: readonly Picture<RunResult>[] = [
  outlets,
  loopSignals,
  levels,
  profiles,
  stageTimeMap,
  operating,
];
/** Pictures of `steady`. */
export const steadyTable: readonly Picture<SteadyResult>[] = [operating];

/** A picture of a run, drawn of the start-up that a commissioning shows. */
const ofStartUp = (p: Picture<RunResult>): Picture<CommissionResult> => ({
  name: (r, part) => p.name(r.run, part),
  ...(p.parts ? { parts: (r: CommissionResult) => p.parts?.(r.run) ?? [] } : {}),
  config: (r, part) => p.config(r.run, part),
});
/** Pictures of `commission`. */
export const commissionTable: readonly Picture<CommissionResult>[] = [
  approach,
  timeline,
  ofStartUp(levels),
  ofStartUp(stageTimeMap),
  fan,
  comparison,
];

/** Pictures of `rehearse`. */
export const rehearseTable: readonly Picture<Rehearsed>[] = [
  answers,
  ranked,
  startSize,
  frequency,
  answerLevels,
];

export interface Drawn {
  readonly name: string;
  readonly png: Buffer;
  /** What it was made of, where it is a sheet of panels over time. */
  readonly sheet?: Sheet | undefined;
}

export const runPictures = (r: RunResult, scale = 1): AsyncGenerator<Drawn> => all(runTable, r, scale);
export const steadyPictures = (r: SteadyResult, scale = 1): AsyncGenerator<Drawn> =>
  all(steadyTable, r, scale);

export const commissionPictures = (r: CommissionResult, scale = 1): AsyncGenerator<Drawn> =>
  all(commissionTable, r, scale);

export const rehearsePictures = (r: Rehearsed, scale = 1): AsyncGenerator<Drawn> =>
  all(rehearseTable, r, scale);

export async function* all<R>(table: readonly Picture<R>[], r: R, scale: number): AsyncGenerator<Drawn> {
  const used = new Map<string, number>();
  for (const p of table)
    for (const part of p.parts?.(r) ?? [undefined]) {
      const name = p.name(r, part);
      // Names that differ in marks alone would be one file.
      const times = (used.get(name) ?? 0) + 1;
      used.set(name, times);
      const config = p.config(r, part);
      const sheet = sheetOf(config);
      yield {
        name: times === 1 ? name : name.replace(/\.png$/, `-${times}.png`),
        png: await draw(config, scale),
        sheet,
      };
    }
}
