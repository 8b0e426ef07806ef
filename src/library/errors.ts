import type { Complaint } from './types.ts';

/** A scenario is refused: every complaint at once, in the message and one by one. */
export class ScenarioRefused extends Error {
  override readonly name = 'ScenarioRefused';
  readonly complaints: readonly Complaint[];

  constructor(message: string, complaints: readonly Complaint[]) {
    super(message);
    this.complaints = complaints;
  }
}

/** A computation that came to no end; the message says where, why, and what to do. */
export class NotCompleted extends Error {
  override readonly name = 'NotCompleted';
}
