// Times the integration of the reference cases, warm, one core, records and totals included.
//   npm run bench -- [--case ten] [--repeats 51] [--json] [--against PATH]
// PATH is the compiled comparison program for case "ten"; it then runs in turn with ours.
import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync } from 'node:fs';
import { cpus, tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { assemble } from '../../dist/plant/assemble.js';
import { readScenario } from '../../dist/scenario/read.js';
import { integrate } from '../../dist/solve/integrate.js';
import { Recorder } from '../../dist/study/records.js';
import { startState } from '../../dist/study/run.js';
import { upsetSchedule } from '../../dist/study/upsets.js';

const { values: options } = parseArgs({
  options: {
    case: { type: 'string' },
    repeats: { type: 'string', default: '51' },
    json: { type: 'boolean', default: false },
    against: { type: 'string' },
  },
});
const repeats = Number(options.repeats);
const cases = {
  ten: { file: 'ten' },
  circuit: { file: 'saltbush-copper' },
  'two metals': { file: 'mulga-two-metals', horizon: 24 * 3600 },
};
const tolerances = [3e-3, 1e-3, 1e-4, 1e-5, 1e-6];

function prepare(name) {
  const file = fileURLToPath(new URL(`../../scenarios/${cases[name].file}.yaml`, import.meta.url));
  const read = readScenario(readFileSync(file, 'utf8'), { file, folder: dirname(file) }).scenario;
  const scenario = { ...read, horizon: cases[name].horizon ?? read.horizon };
  const plant = assemble(scenario);
  const { schedule } = upsetSchedule(plant, scenario.upsets, scenario.horizon);
  return { scenario, plant, schedule, initial: startState(plant) };
}

/** One run as the product makes it; `look` is called with each record time and state when the error is wanted. */
function once({ scenario, plant, schedule, initial }, tolerance, look) {
  const watchers = [new Recorder(plant, scenario.recordEvery)];
  if (look) watchers.push(look);
  const began = performance.now();
  const result = integrate(
    { system: plant.system, parameters: plant.parameters, schedule, initial },
    { integrator: 'rodas5p', tolerance: { relative: tolerance }, maximumSteps: 1e7, firstStep: 1 },
    watchers,
  );
  return { ms: performance.now() - began, work: result.work };
}

/** States at all record times after the start. */
function states(p, tolerance) {
  const list = [];
  const n = p.plant.system.places.length;
  const every = p.scenario.recordEvery;
  let next = 1;
  once(p, tolerance, {
    step(step) {
      for (; next * every <= step.t1; next++) {
        const x = new Float64Array(n);
        step.at(next * every, x);
        list.push(x);
      }
    },
  });
  return list;
}

/** max over records and places of |u − ref| / (|ref| + 1e-3), u in kg/m³: amounts over the volume they stand in. */
function worstError(p, list, reference) {
  const volume = volumes(p);
  let worst = 0;
  reference.forEach((ref, k) => {
    for (const [i, V] of volume) {
      const r = ref[i] / V;
      worst = Math.max(worst, Math.abs(list[k][i] / V - r) / (Math.abs(r) + 1e-3));
    }
  });
  return worst;
}

function volumes({ scenario, plant }) {
  const { places } = plant.system;
  const at = new Map();
  scenario.trains.forEach((t, i) => {
    t.stages.forEach((stage, j) => {
      const { mixer } = plant.designs[i].stages[j];
      for (const phase of ['aqueous', 'organic'])
        for (const c of [...scenario.solutes, ...(phase === 'aqueous' ? scenario.species : [])]) {
          at.set(`${t.name}.${j + 1}.mixer.${phase}.${c}`, mixer[phase]);
          for (let k = 1; k <= stage.settler.parts; k++)
            at.set(
              `${t.name}.${j + 1}.settler.${k}.${phase}.${c}`,
              stage.settler[phase] / stage.settler.parts,
            );
        }
    });
  });
  for (const t of scenario.tanks)
    for (const c of scenario.solutes) at.set(`${t.name}.${t.phase}.${c}`, t.held);
  return places.flatMap((q, i) => (at.has(q.path) ? [[i, at.get(q.path)]] : []));
}

const quantile = (list, q) => [...list].sort((a, b) => a - b)[Math.floor(q * (list.length - 1))];

const rows = [];
for (const name of Object.keys(cases).filter((c) => !options.case || c === options.case)) {
  const p = prepare(name);
  const reference = states(p, 1e-11);
  for (const tolerance of tolerances) {
    const error = worstError(p, states(p, tolerance), reference);
    for (let k = 0; k < 20; k++) once(p, tolerance);
    const times = [];
    let work;
    for (let k = 0; k < repeats; k++) {
      const r = once(p, tolerance);
      times.push(r.ms);
      work = r.work;
    }
    const median = quantile(times, 0.5);
    rows.push({
      case: name,
      rtol: tolerance,
      worst_error: error,
      median_ms: median,
      low_ms: quantile(times, 0.1),
      high_ms: quantile(times, 0.9),
      steps: work.steps,
      rejected: work.rejectedByError,
      factorisations: work.factorisations,
      us_per_step: (1e3 * median) / work.steps,
    });
  }
}
if (options.against) rows.push(...compiled(options.against));

if (options.json)
  process.stdout.write(`${JSON.stringify({ cpu: cpus()[0].model, node: process.version, rows })}\n`);
else {
  process.stdout.write(`${cpus()[0].model}, node ${process.version}, median of ${repeats} (10 % to 90 %)\n`);
  for (const r of rows)
    process.stdout.write(
      `${r.case.padEnd(16)} rtol ${String(r.rtol).padEnd(7)} error ${r.worst_error.toExponential(1)}  ${r.median_ms.toFixed(3)} ms` +
        `${r.low_ms === undefined ? '' : ` (${r.low_ms.toFixed(3)} to ${r.high_ms.toFixed(3)})`}  ${r.steps} steps\n`,
    );
}

/** The comparison program on the same case at its own tolerances, with its own reference. */
function compiled(path) {
  const reference = join(mkdtempSync(join(tmpdir(), 'upsettle-bench-')), 'ten.ref');
  execFileSync(path, ['banded', '1e-12', '1', '10', '--write', reference]);
  return ['banded', 'sparse'].flatMap((solver) =>
    [1e-3, 1e-4, 1e-5].map((rtol) => {
      const r = JSON.parse(
        execFileSync(path, [solver, String(rtol), '51', '10', '--reference', reference], {
          encoding: 'utf8',
        }),
      );
      return {
        case: `compiled ${solver}`,
        rtol,
        worst_error: r.worst_error,
        median_ms: r.median_ms,
        steps: r.steps,
      };
    }),
  );
}
