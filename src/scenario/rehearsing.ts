import type { Analyser } from './analyser.ts';
import type { Change } from './scenario.ts';

/** What a scenario says for its rehearsal, beyond the plant and its upsets; SI. */
export interface Rehearsing {
  readonly answers: readonly Answer[];
  readonly instruments: readonly Instrument[];
  readonly variations: readonly Variation[];
  /** Whether the scenario says how the run starts; a rehearsal starts steady otherwise. */
  readonly startStated: boolean;
  /** Milliseconds of the plant's clock at time zero, as if its zone were UTC; null: not stated. */
  readonly timeZero: number | null;
}

/** Operator moves against an upset: one step, or several carried out one after the other by one operator. */
export interface Answer {
  readonly name: string;
  readonly steps: readonly Step[];
  /** s that the operator needs from the last move of a step to the first of the next. */
  readonly between: number;
}

export interface Step {
  readonly name: string;
  readonly begins: Begin;
  /** `at` counts from the start of the step. */
  readonly moves: readonly Change[];
  /** When all of its moves begin to be taken back; null: not at all. */
  readonly ends: End | null;
}

export type Begin =
  /** s after an upset begins (by its number from 1, in the order of their times); negative: before it. */
  | { readonly after: number; readonly upset: number }
  /** s from the start of the run. */
  | { readonly at: number }
  /** s after a reading, or a quantity itself, is first seen beyond a value once the first upset has begun. */
  | { readonly when: Condition; readonly after: number };

export interface Condition {
  /** Index of the instrument that is read; null: the quantity itself. */
  readonly instrument: number | null;
  readonly quantity: string;
  readonly side: 'above' | 'below';
  readonly value: number;
  readonly words: string;
}

export type End =
  | { readonly afterStart: number }
  | { readonly afterUpset: number; readonly upset: number }
  | { readonly afterUpsetEnds: number; readonly upset: number };

/** An analyser or a laboratory by which people can know of an upset. */
export interface Instrument extends Analyser {
  readonly name: string;
  /** Path of the output that it measures. */
  readonly quantity: string;
  /** Level at which people are warned, kg/m³; null: any departure that its noise cannot explain. */
  readonly warn: number | null;
}

/** A feed that varies at random about its value at time zero: first-order autoregressive. */
export interface Variation {
  readonly quantity: string;
  /** SI, with the value that it varies about. */
  readonly base: number;
  readonly deviation: number;
  /** s after which the correlation has fallen to 1/e. */
  readonly correlation: number;
  /** s between two corners. */
  readonly every: number;
  readonly seed: number;
  readonly words: string;
}
