import type { Inputs } from './inputs.ts';
import type { Stop, Work } from './outcome.ts';
import type { F, System } from './system.ts';

export interface Tolerance {
  /** Relative tolerance; the absolute one of a place is this times its scale. */
  readonly relative: number;
}

/** An accepted step, with its solution in between. Valid until the next step begins. */
export interface Step {
  readonly t0: number;
  readonly t1: number;
  /** State at t1. */
  readonly x1: F;
  /** Whether the run may pause at t1 without a change to any of its figures. */
  readonly pausable: boolean;
  /** State at t in [t0, t1]. */
  at(t: number, x: F): void;
}

/** Called after each accepted step; a time in the step, its end included, ends the stretch there. */
export type OnStep = (step: Step) => number;

/** A stretch without corners: the inputs are linear in time on it. */
export interface Stretch {
  readonly from: number;
  readonly to: number;
  readonly inputs: Inputs;
}

export type StretchEnd =
  | { readonly ended: 'at-end' }
  | { readonly ended: 'asked'; readonly time: number }
  | { readonly ended: 'failed'; readonly stop: Stop };

/** One-step methods and extrapolation alike: they advance over a stretch and report accepted steps. */
export interface Integrator {
  readonly name: string;
  readonly work: Work;
  /** Gives back what the run has borrowed; nothing may be asked of it, nor of a step, afterwards. */
  close?(): void;
  /** Advances `x` in place over the stretch. */
  advance(stretch: Stretch, x: F, onStep: OnStep): StretchEnd;
}

export interface Settings {
  readonly tolerance: Tolerance;
  /** Steps allowed in a run. */
  readonly maximumSteps: number;
  /** First step to try [s]. */
  readonly firstStep: number;
}

export type MakeIntegrator = (system: System, p: F, settings: Settings) => Integrator;
