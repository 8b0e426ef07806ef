/*
 * What the library hands out: plain data. Figures are SI (s, m³, m³/s, kg, kg/m³ which is g/L), shares are of 1.
 */

/** A quantity that a run records or a steady state has. */
export interface Quantity {
  /** Such as `raffinate.copper`, `organic tank.volume`, `extraction.2.settler.aqueous.copper`. */
  readonly path: string;
  /** Such as `kg/m^3`; empty for a plain number. */
  readonly unit: string;
}

/** One thing that is wrong with a scenario. */
export interface Complaint {
  /** Keys to the setting, joined by dots; empty for the file as a whole. */
  readonly path: string;
  /** What is wrong, and what to do. */
  readonly message: string;
  /** Where it stands in the text, from 1. */
  readonly line: number;
  readonly column: number;
}

/** A setting's new value, as a scenario file has it; undefined takes the setting out. */
export type Setting = string | number | boolean | object | undefined;

export interface SimulateOptions {
  /** Relative tolerance, 1e-6 by default. */
  readonly tolerance?: number;
  readonly integrator?: 'rodas5p' | 'rodas4' | 'odex';
  /** Called with the share of the horizon that has been computed. */
  readonly progress?: (share: number) => void;
}

/** How a limit fared over a run. */
export interface LimitOutcome {
  /** Such as `raffinate.copper`. */
  readonly keep: string;
  readonly side: 'below' | 'above';
  readonly limit: number;
  readonly unit: string;
  readonly kept: boolean;
  /** s outside the limit in all, and each uninterrupted time; `to` is null where it lasts to the end. */
  readonly outside: number;
  readonly spells: readonly { readonly from: number; readonly to: number | null }[];
  /** Null where it was never judged. */
  readonly worst: { readonly value: number; readonly time: number } | null;
  /** kg beyond a concentration's upper limit; null for other quantities. */
  readonly beyond: number | null;
}

/** Something that happened to the plant by itself: a tank ran empty, a settler flooded. */
export interface PlantEvent {
  /** s */
  readonly time: number;
  readonly name: string;
  readonly message: string;
}

export interface Simulation {
  /** Whether the horizon was reached; if not, `ended` says why and what to do. */
  readonly complete: boolean;
  readonly ended: string;
  /** s of each record. */
  readonly times: readonly number[];
  readonly quantities: readonly Quantity[];
  /** One value for each of `times`. @throws RangeError naming the nearest quantity where there is none of that path. */
  values(path: string): Float64Array;
  readonly limits: readonly LimitOutcome[];
  readonly events: readonly PlantEvent[];
  /** Largest |held − held before − in + out| / (in + held before) of any solute, species or phase. */
  readonly closure: number;
}

/** What a train does at rest to one solute. */
export interface TrainAtRest {
  readonly train: string;
  readonly solute: string;
  /** Share of what the giving phase brings. */
  readonly recovery: number;
  /** kg/s from the aqueous to the organic; negative where it is stripped. */
  readonly transferred: number;
  /** Share of what the organic can hold; null where its law has no ceiling. */
  readonly loading: number | null;
}

export interface SteadyState {
  readonly quantities: readonly Quantity[];
  /** @throws RangeError naming the nearest quantity where there is none of that path. */
  value(path: string): number;
  readonly trains: readonly TrainAtRest[];
  /** Tanks that gain (m³/s) or lose volume while all else is at rest. */
  readonly drifts: readonly { readonly tank: string; readonly rate: number }[];
}

/** When one outlet, stream or tank comes good for good; s, null where it does not. */
export interface ComesGood {
  readonly path: string;
  /** kg/m³ at the start and at rest. */
  readonly start: number;
  readonly final: number | null;
  /** s until it stays within 10, 5, 2 and 1 % of its change. */
  readonly within: readonly { readonly percent: number; readonly time: number | null }[];
}

export interface StartUp {
  /** s until every outlet stays within 1 % of its change. */
  readonly atRest: number | null;
  /** s until every limit is kept for good; null without limits as well. */
  readonly onSpec: number | null;
  /** s in which the slowest deviations fall by e. */
  readonly slowest: readonly number[];
  readonly quantities: readonly ComesGood[];
  /** The plain start and the scenario's procedures, fastest first. */
  readonly starts: readonly {
    readonly name: string;
    readonly atRest: number | null;
    readonly onSpec: number | null;
  }[];
}
