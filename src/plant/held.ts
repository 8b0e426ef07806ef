import type { F } from '../solve/system.ts';
import type { Plant } from './assemble.ts';
import { PHASES } from './flow.ts';

/**
 * The volume that each amount stands in at a state, m³, place by place; for the organic hold-up of a full mixer the
 * mixer. NaN where a place is neither.
 */
export function heldVolumes(plant: Plant, x: F): F {
  const { scenario: s, system, designs } = plant;
  const at = new Map(system.places.map((p, i) => [p.path, i]));
  const state = (path: string): number | undefined => x[at.get(path) ?? -1];
  const volumes = new Map<string, number>();
  s.trains.forEach((t, i) => {
    t.stages.forEach((q, j) => {
      const path = `${t.name}.${j + 1}`;
      const d = designs[i].stages[j];
      const organic = state(`${path}.mixer.organic.volume`) ?? d.mixer.organic;
      const mixer = { organic, aqueous: state(`${path}.mixer.aqueous.volume`) ?? q.mixer.volume - organic };
      if (t.hydraulics === 'full') volumes.set(`${path}.mixer.organic.volume`, q.mixer.volume);
      for (const phase of PHASES) {
        const band = state(`${path}.band.${phase}.volume`) ?? 0;
        const all = d.mixer[phase] + d.band[phase] + d.layer[phase];
        const layer = state(`${path}.settler.${phase}.volume`) ?? all - mixer[phase] - band;
        volumes.set(`${path}.mixer.${phase}`, mixer[phase]);
        volumes.set(`${path}.band.${phase}`, band);
        for (let k = 1; k <= q.settler.parts; k++)
          volumes.set(`${path}.settler.${k}.${phase}`, layer / q.settler.parts);
      }
    });
  });
  for (const t of s.tanks) volumes.set(`${t.name}.${t.phase}`, state(`${t.name}.volume`) ?? t.held);
  for (const b of s.batches) {
    volumes.set(`${b.name}.mixer.organic`, b.mixer.volume * b.organicShare);
    volumes.set(`${b.name}.mixer.aqueous`, b.mixer.volume * (1 - b.organicShare));
  }
  return Float64Array.from(system.places, ({ path, kind }) => {
    const of = kind === 'amount' ? path.slice(0, path.lastIndexOf('.')) : path;
    return volumes.get(of) ?? Number.NaN;
  });
}
