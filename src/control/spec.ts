import type { AnalyserSpec } from './analyser.ts';
import type { Line } from './line.ts';

/** A loop as the control room sees it: numbers of inputs and outputs of the joined System, SI. */
export interface LoopSpec {
  readonly name: string;
  /** Output that it measures, and the flow that a composite is weighted with (−1: none). */
  readonly measured: number;
  readonly weighedBy: number;
  readonly analyser: AnalyserSpec;
  readonly seed: number;
  readonly move: MoveSpec;
  readonly settings: PidSettings;
  readonly runs: 'on each result' | 'scan';
  readonly auto: boolean;
  /** The operator puts it in automatic or manual. */
  readonly modes: readonly { readonly at: number; readonly auto: boolean }[];
  /** While out of service its flow follows the schedule. */
  readonly service: readonly { readonly at: number; readonly on: boolean }[];
  readonly setPoint: Line;
  /** Limits of the output over time, where somebody changes them. */
  readonly limits: { readonly low: Line; readonly high: Line } | null;
  /** Output while in manual, where somebody changes it. */
  readonly manual: Line | null;
  readonly feedforward: FeedforwardSpec | null;
  readonly inputs: LoopInputs;
}

export interface LoopInputs {
  readonly output: number;
  /** Whether the station is in service; −1 where the loop moves another loop's set point. */
  readonly gate: number;
  readonly measurement: number;
  readonly setPoint: number;
  /** Flow that its station sets, and the wild flow (−1: none). */
  readonly flow: number;
  readonly wild: number;
  /** Inputs that are 0 while something overrules the loop: its pump is tripped, or its tank empty. */
  readonly overruling: readonly number[];
}

export interface MoveSpec {
  readonly low: number;
  readonly high: number;
  /** Per s; Infinity where nothing limits it. */
  readonly up: number;
  readonly down: number;
  /** The wild flow below which a ratio means nothing: the loop holds. */
  readonly leastWild: number;
  /** Limits of the flow that a ratio sets; 0 and Infinity where there are none. */
  readonly flowLow: number;
  readonly flowHigh: number;
}

/** ISA standard form: u = Kc·[e_b + ∫e dt/Ti ∓ Td·dPV_f/dt]. */
export interface PidSettings {
  /** +1 direct (e = PV − SP), −1 reverse (e = SP − PV). */
  readonly sense: 1 | -1;
  /** Output per unit of measurement, ≥ 0. */
  readonly gain: number;
  /** s */
  readonly integralTime: number;
  readonly derivativeTime: number;
  /** Time constant of the filter on the measurement, s. */
  readonly filter: number;
  /** b in e_b = b·SP and PV. */
  readonly setPointWeight: number;
}

/** A derivative is filtered with Td/N (from memory). */
export const DERIVATIVE_FILTER = 8;

export interface FeedforwardSpec {
  readonly measured: number;
  readonly weighedBy: number;
  readonly analyser: AnalyserSpec;
  readonly seed: number;
  /** Output per unit of the disturbance. */
  readonly gain: number;
  /** s; both 0: static. */
  readonly lead: number;
  readonly lag: number;
  /** `multiply`: the output is in proportion to the disturbance. */
  readonly form: 'add' | 'multiply';
}
