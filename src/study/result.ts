import type { Closure } from '../plant/accounts.ts';
import type { Plant } from '../plant/assemble.ts';
import type { Event } from '../solve/integrate.ts';
import type { Stop, Work } from '../solve/outcome.ts';
import type { F } from '../solve/system.ts';
import type { LoopReport } from './control/report.ts';
import type { LoopAtRest } from './control/settle.ts';
import type { Derived } from './derived.ts';
import type { Diagram } from './diagram.ts';
import type { LimitReport } from './limit-watch.ts';
import type { Records } from './records.ts';
import type { TrainFigures } from './train-figures.ts';
import type { Course, Shade } from './upsets.ts';

/** The plant at one moment that a picture or a reader looks at. */
export interface Snapshot {
  /** Such as "start", "before the upset", "worst", "end". */
  readonly label: string;
  /** s */
  readonly time: number;
  /** Outputs in the System's order. */
  readonly outputs: F;
}

/** Everything that `run` found; reports need nothing else. SI units throughout. */
export interface RunResult {
  readonly plant: Plant;
  readonly records: Records;
  readonly limits: readonly LimitReport[];
  readonly events: readonly Event[];
  readonly shades: readonly Shade[];
  /** Inputs that changed, as they were. */
  readonly courses: readonly Course[];
  readonly clamped: readonly { readonly quantity: string; readonly time: number; readonly at: number }[];
  readonly closures: readonly Closure[];
  readonly snapshots: readonly Snapshot[];
  readonly diagrams: readonly Diagram[];
  readonly stop: Stop;
  /** Whether the horizon was reached. */
  readonly complete: boolean;
  readonly work: Work;
  readonly integrator: string;
  readonly tolerance: number;
  /** The state at the end (or when asked), as it is kept in a file. */
  readonly kept: object | null;
  /** Figures that follow from each row of records. */
  readonly derived: readonly Derived[];
  /** At the end. */
  readonly figures: readonly TrainFigures[];
  readonly loops: readonly LoopReport[];
}

export interface SteadyResult {
  readonly plant: Plant;
  readonly outputs: F;
  readonly iterations: number;
  readonly residual: number;
  /** Tanks that only drift: m³/s gained, and s until full or empty. */
  readonly drifts: readonly { readonly tank: string; readonly rate: number; readonly until: number }[];
  readonly figures: readonly TrainFigures[];
  readonly diagrams: readonly Diagram[];
  /** Mixers in which more of a species is taken up than there is: what is said of them is not to be trusted. */
  readonly usedUp: readonly { readonly stage: string; readonly species: string }[];
  /** Largest imbalance at the boundary less what drifting tanks gain, relative to what enters, by component. */
  readonly imbalance: number;
  readonly loops: readonly LoopAtRest[];
}
