// The plants that speed is measured on, and one run of each as the product makes it.
import { readFileSync } from 'node:fs';
import { dirname } from 'node:path';
import { fileURLToPath } from 'node:url';
import { assemble } from '../../dist/plant/assemble.js';
import { readScenario } from '../../dist/scenario/read.js';
import { integrate, integrators } from '../../dist/solve/integrate.js';
import { Recorder } from '../../dist/study/records.js';
import { startModes, startState } from '../../dist/study/run.js';
import { upsetSchedule } from '../../dist/study/upsets.js';

const DAY = 86_400;

/** By name: the scenario, what is changed of it, the run that errors are told against, and the tolerances swept. */
export const cases = {
  ten: { file: 'ten', tight: 1e-11, tolerances: [3e-3, 1e-3, 1e-4, 1e-5, 1e-6] },
  circuit: { file: 'saltbush-copper', tight: 1e-10, tolerances: [1e-3, 1e-4, 1e-5, 1e-6] },
  vessels: { file: 'saltbush-vessels', tight: 1e-8, tolerances: [1e-3, 1e-4, 1e-5, 1e-6], repeats: 5 },
  'two metals': {
    file: 'mulga-two-metals',
    horizon: DAY,
    tight: 1e-10,
    tolerances: [1e-3, 1e-4, 1e-5, 1e-6],
  },
  'stages 100': { file: 'ten', stages: 100, tight: 1e-9, tolerances: [1e-3, 1e-4], repeats: 15 },
  'stages 1000': { file: 'ten', stages: 1000, tight: 1e-7, tolerances: [1e-3, 1e-4], repeats: 3 },
};

/** Reads and sets up a case. `setup_ms`: from the checked scenario to the first value of dx/dt. */
export function prepare(name) {
  const c = cases[name];
  const file = fileURLToPath(new URL(`../../scenarios/${c.file}.yaml`, import.meta.url));
  let text = readFileSync(file, 'utf8');
  if (c.stages) text = text.replace('stages: 10', `stages: ${c.stages}`);
  const read = readScenario(text, { file, folder: dirname(file) }).scenario;
  const scenario = { ...read, horizon: c.horizon ?? read.horizon };
  const began = performance.now();
  const plant = assemble(scenario);
  const initial = startState(plant);
  plant.system.rhs(initial, plant.inputs, plant.parameters, new Float64Array(initial.length));
  const own = integrators.rodas5p(plant.system, plant.parameters, options(1e-3));
  own.close?.();
  const setup_ms = performance.now() - began;
  const { schedule } = upsetSchedule(plant, scenario.upsets, scenario.horizon);
  return { name, scenario, plant, schedule, initial, setup_ms, modes: startModes(plant) };
}

const options = (relative, integrator = 'rodas5p') => ({
  integrator,
  tolerance: { relative },
  maximumSteps: 1e7,
  firstStep: 1,
});

/** One run; amounts, totals and, unless it is to be `bare`, records. `look` is a further watcher. */
export function once(p, tolerance, { look, bare = false, integrator } = {}) {
  const watchers = bare ? [] : [new Recorder(p.plant, p.scenario.recordEvery)];
  if (look) watchers.push(look);
  const { system, parameters } = p.plant;
  const began = performance.now();
  const result = integrate(
    { system, parameters, schedule: p.schedule, initial: p.initial, ...p.modes },
    options(tolerance, integrator),
    watchers,
  );
  return { ms: performance.now() - began, work: result.work };
}
