/** Work of a run, counted by cause. */
export interface Work {
  steps: number;
  rejectedByError: number;
  rejectedByNegative: number;
  rejectedByNonFinite: number;
  rejectedBySingular: number;
  rhs: number;
  jacobians: number;
  factorisations: number;
  solves: number;
  refinements: number;
  pivotings: number;
  /** Fresh starts after a corner of the inputs or a guard. */
  restarts: number;
}

export const noWork = (): Work => ({
  steps: 0,
  rejectedByError: 0,
  rejectedByNegative: 0,
  rejectedByNonFinite: 0,
  rejectedBySingular: 0,
  rhs: 0,
  jacobians: 0,
  factorisations: 0,
  solves: 0,
  refinements: 0,
  pivotings: 0,
  restarts: 0,
});

/** Why an integration came to its end. `place` is the path of the state that decided, where one did. */
export type Stop =
  | { readonly reason: 'reached-end'; readonly time: number }
  | { readonly reason: 'guard'; readonly time: number; readonly guard: string; readonly message: string }
  | { readonly reason: 'interrupted'; readonly time: number }
  | {
      readonly reason: 'step-too-small';
      readonly time: number;
      readonly place: string;
      readonly cause: string;
    }
  | { readonly reason: 'not-finite'; readonly time: number; readonly place: string }
  | { readonly reason: 'too-many-steps'; readonly time: number; readonly limit: number }
  | { readonly reason: 'too-many-events'; readonly time: number; readonly guard: string };

/** The stop in one sentence that ends in what to do. */
export function explain(stop: Stop): string {
  const hours = `${(stop.time / 3600).toPrecision(6)} h`;
  switch (stop.reason) {
    case 'reached-end':
      return `reached the horizon at ${hours}`;
    case 'guard':
      return `stopped at ${hours}: ${stop.message}`;
    case 'interrupted':
      return `interrupted at ${hours}`;
    case 'step-too-small':
      return `could not go on at ${hours} in ${stop.place}: ${stop.cause}; look at what flows into that place then, or try a looser --tolerance`;
    case 'not-finite':
      return `the balance has no finite value at ${hours} in ${stop.place}; look at the equilibrium law and the volumes there`;
    case 'too-many-steps':
      return `gave up at ${hours} after ${stop.limit} steps; shorten the horizon, loosen --tolerance or use the default integrator`;
    case 'too-many-events':
      return `gave up at ${hours}: "${stop.guard}" switches without end; give the tank more volume or a steadier flow`;
  }
}
