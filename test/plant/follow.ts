import { assemble, type Plant } from '../../src/plant/assemble.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { integrate, type Run } from '../../src/solve/integrate.ts';
import type { F } from '../../src/solve/system.ts';
import { upsetSchedule } from '../../src/study/upsets.ts';

export interface Followed {
  readonly plant: Plant;
  readonly run: Run;
  /** A place at the end, by its path. */
  readonly at: (path: string) => number;
}

/** A scenario from barren to its horizon, down to the states themselves; `look` sees each state reached. */
export function follow(
  s: Scenario,
  tolerance: number,
  look: (x: F, plant: Plant) => void = () => {},
): Followed {
  const plant = assemble(s);
  const { system, parameters, barren } = plant;
  const { schedule } = upsetSchedule(plant, s.upsets, s.horizon);
  const run = integrate(
    { system, parameters, schedule, initial: barren },
    { integrator: 'rodas5p', tolerance: { relative: tolerance }, maximumSteps: 100_000, firstStep: 1 },
    [{ step: ({ x1 }) => look(x1, plant) }],
  );
  return {
    plant,
    run,
    at(path) {
      const i = system.places.findIndex((p) => p.path === path);
      if (i < 0) throw new Error(`no place ${path}`);
      return run.state[i];
    },
  };
}
