// The worst transient error of a run against a tight one, by the measure of the comparison program:
// max over all records after the start and all concentrations of |u − ref| / (|ref| + 1e-3), u in kg/m³.
import { once } from './cases.mjs';

/** Concentrations at all record times after the start. */
export function concentrations(p, tolerance, integrator) {
  const read = reader(p);
  const every = p.scenario.recordEvery;
  const list = [];
  let next = 1;
  const x = new Float64Array(p.plant.system.places.length);
  const w = new Float64Array(p.plant.system.inputs.length);
  const look = {
    step(step, inputs) {
      for (; next * every <= step.t1; next++) {
        step.at(next * every, x);
        inputs.value(next * every, w);
        list.push(read(x, w));
      }
    },
  };
  once(p, tolerance, { look, ...(integrator ? { integrator } : {}) });
  return list;
}

export function worstError(list, reference) {
  let worst = 0;
  reference.forEach((ref, k) => {
    ref.forEach((r, i) => {
      worst = Math.max(worst, Math.abs(list[k][i] - r) / (Math.abs(r) + 1e-3));
    });
  });
  return worst;
}

/** Amounts over the volumes they stand in; where volumes move, the concentrations that the plant itself reports. */
function reader({ scenario, plant }) {
  const { system } = plant;
  const moving = system.places.some((q) => q.kind === 'volume');
  if (!moving) {
    const held = volumes(scenario, plant);
    return (x) => Float64Array.from(held, ([i, v]) => x[i] / v);
  }
  const own = system.outputs.flatMap((o, i) => (o.unit === 'kg/m^3' ? [i] : []));
  const y = new Float64Array(system.outputs.length);
  return (x, w) => {
    system.output(x, w, plant.parameters, y);
    return Float64Array.from(own, (i) => y[i]);
  };
}

function volumes(scenario, plant) {
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
  return plant.system.places.flatMap((q, i) => (at.has(q.path) ? [[i, at.get(q.path)]] : []));
}
