import type { Scenario } from '../../scenario/scenario.ts';
import type { Spread } from '../workers.ts';
import { Branches, type Care } from './branches.ts';
import { contourPieces, type MapPoint } from './contour.ts';
import { type Ground, ground, type Standing } from './ground.ts';
import { judge } from './judge.ts';
import { plan } from './plan.ts';
import { followedOutputs, makeTrigger, type RehearseResult } from './rehearse.ts';
import { spread } from './scan.ts';

/** Start × size of one answer → worst value of a limited quantity, or time out of the limit; SI. */
export interface StartSizeMap {
  readonly answer: string;
  readonly of: 'worst' | 'time';
  readonly path: string;
  /** Of the values: that of the quantity, or s. */
  readonly unit: string;
  readonly side: 'below' | 'above';
  /** The limit; 0 for the time out of it. */
  readonly limit: number;
  /** s of the run. */
  readonly starts: readonly number[];
  /** Factors on every `by` of the answer as written. */
  readonly sizes: readonly number[];
  /** values[size][start] */
  readonly values: readonly (readonly number[])[];
  /** Pieces of the line on which the limit is just kept. */
  readonly contour: readonly (readonly [MapPoint, MapPoint])[];
}

export interface MapSettings {
  readonly columns: number;
  readonly rows: number;
  readonly of: 'worst' | 'time';
  readonly progress?: (share: number) => void;
  readonly stop?: AbortSignal;
}

/** One piece of work: all sizes at some starts. Plain data, so that it can be sent. */
export interface MapBatch {
  readonly scenario: Scenario;
  /** Null where there are loops, which cannot be sent: the run up to there is made anew. */
  readonly before: Standing | null;
  readonly answer: string;
  readonly chief: number;
  readonly starts: readonly number[];
  readonly sizes: readonly number[];
  readonly integrator: string;
}

/** Worst value of the limited quantity, and s out of its limit. */
export interface MapCell {
  readonly worst: number;
  readonly outside: number;
}

/** Relative tolerance of a map: its colours show three digits. */
const TOLERANCE = 1e-4;
/** Pieces of work for each column of the map: few columns each, so that progress is seen. */
const COLUMNS = 2;
/** Largest factor on the answer as written, and room beyond the break in which starts come too late. */
const LARGEST = 2;
const BEYOND = 1.35;

/** The map of an answer. Results depend on the scenario and the grid alone, not on who computes what. */
export async function startSizeMap(
  r: RehearseResult,
  answer: string,
  settings: MapSettings,
  compute: Spread<MapBatch, MapCell[][]>,
): Promise<StartSizeMap> {
  const { ground: g, chief } = r;
  const l = r.nothing.limits[chief];
  const broken = l.breaks?.time ?? g.horizon;
  const last = Math.min(g.horizon, g.first + BEYOND * (broken - g.first));
  const starts = spread(g.first, last, settings.columns);
  const sizes = spread(0, LARGEST, settings.rows);
  const pieces = Array.from({ length: Math.ceil(starts.length / COLUMNS) }, (_, i) =>
    starts.slice(i * COLUMNS, (i + 1) * COLUMNS),
  );
  const { commissioning: _, ...scenario } = g.scenario;
  const batches = pieces.map(
    (own): MapBatch => ({
      scenario,
      before: g.joined.loops.length > 0 ? null : g.before,
      answer,
      chief,
      starts: own,
      sizes,
      integrator: r.settings.integrator,
    }),
  );
  const none: MapCell = { worst: Number.NaN, outside: Number.NaN };
  const cells = sizes.map(() => new Array<MapCell>(starts.length).fill(none));
  let done = 0;
  await compute(
    batches,
    (b, block) => {
      block.forEach((column, i) => {
        column.forEach((v, k) => {
          cells[k][b * COLUMNS + i] = v;
        });
      });
      done += block.length;
      settings.progress?.(done / starts.length);
    },
    settings.stop ?? new AbortController().signal,
  );
  const time = settings.of === 'time';
  return {
    answer,
    of: settings.of,
    path: l.path,
    unit: time ? 's' : l.unit,
    side: l.limit.side,
    limit: time ? 0 : l.limit.value,
    starts,
    sizes,
    values: cells.map((row) => row.map((c) => (time ? c.outside : c.worst))),
    // A time is zero wherever the limit is kept and does not say by how much: the worst value does.
    contour: contourPieces(
      starts,
      sizes,
      cells.map((row) => row.map((c) => c.worst)),
      l.limit.value,
    ),
  };
}

/** The plant of the last batch: a worker assembles it once for all batches of a map. */
let last: { key: string; made: Columns } | null = null;

/** Values of a batch, by start and then by size. */
export function mapColumns(batch: MapBatch): MapCell[][] {
  const key = JSON.stringify([batch.scenario, batch.answer, batch.chief]);
  if (last?.key !== key) last = { key, made: new Columns(batch) };
  return batch.starts.map((start) => last?.made.column(start, batch.sizes) ?? []);
}

class Columns {
  readonly #g: Ground;
  readonly #batch: MapBatch;
  readonly #care: Care;
  readonly #trigger: ReturnType<typeof makeTrigger>;
  readonly #nothing: Branches;

  constructor(batch: MapBatch) {
    const how = { integrator: batch.integrator, tolerance: TOLERANCE };
    this.#batch = batch;
    this.#care = { sure: how, quick: how };
    this.#g = ground(batch.scenario, how, batch.before === null ? {} : { known: batch.before });
    const outputs = followedOutputs(this.#g);
    this.#trigger = makeTrigger(this.#g, judge(this.#g, this.#g.changes, how, outputs), how, outputs);
    this.#nothing = new Branches(this.#g, this.#g.changes, this.#care);
  }

  column(start: number, sizes: readonly number[]): MapCell[] {
    const g = this.#g;
    const answer = g.scenario.rehearsing?.answers.find((a) => a.name === this.#batch.answer);
    if (!answer) return [];
    return sizes.map((size) => {
      const { moves } = plan(answer, g.upsets, g.horizon, this.#trigger, { start, size });
      return this.#nothing.goesOn([...g.changes, ...moves], start, this.#batch.chief);
    });
  }
}
