import { withChanges } from './loop-changes.ts';
import type { Change, Initial, Scenario } from './scenario.ts';

/** What a scenario says for its commissioning, beyond the plant itself; SI. */
export interface Commissioning {
  readonly samples: Samples | null;
  readonly prices: Prices | null;
  readonly procedures: readonly Procedure[];
  readonly uncertain: readonly Uncertain[];
  readonly compare: Compare | null;
}

export interface Samples {
  /** Share of a result by which two results on the same stream differ at most, 95 times of 100. */
  readonly repeatability: number;
  /** s between two samples. */
  readonly gap: number;
}

export interface Prices {
  readonly currency: string;
  /** Per m³ of a feed or an outlet. */
  readonly streams: ReadonlyMap<string, number>;
  /** Per kg of a solute. */
  readonly solutes: ReadonlyMap<string, number>;
  /** Per J; null where no price is stated. */
  readonly energy: number | null;
  /** W that the plant draws; null: what the agitators draw that are stated by their impellers. */
  readonly power: number | null;
}

/** A way to start the plant: where it starts from, and the moves made, at times from the start on. */
export interface Procedure {
  readonly name: string;
  /** Null: as the scenario starts. */
  readonly start: Scenario['start'] | null;
  readonly tanks: readonly {
    readonly tank: number;
    readonly content: readonly number[] | null;
    readonly held: number | null;
  }[];
  readonly trains: readonly { readonly train: number; readonly initial: Partial<Initial> }[];
  readonly moves: readonly Change[];
}

export interface Uncertain {
  readonly path: string;
  /** Half the width of its range, as a share of the stated value. */
  readonly share: number;
}

/** Plant samples over a start-up, s from the start and SI. */
export interface Compare {
  readonly file: string;
  readonly columns: readonly {
    readonly quantity: string;
    readonly times: readonly number[];
    readonly values: readonly number[];
  }[];
}

/** The scenario as a procedure starts it; its upsets are the moves. */
export function withProcedure(s: Scenario, p: Procedure): Scenario {
  const own: Scenario = {
    ...s,
    start: p.start ?? s.start,
    tanks: s.tanks.map((t, i) => {
      const own = p.tanks.find((q) => q.tank === i);
      return own ? { ...t, content: own.content ?? t.content, held: own.held ?? t.held } : t;
    }),
    trains: s.trains.map((t, i) => {
      const own = p.trains.find((q) => q.train === i);
      return own ? { ...t, initial: { ...t.initial, ...own.initial } } : t;
    }),
  };
  return withChanges(own, p.moves);
}
