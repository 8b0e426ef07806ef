import type { Plant } from '../plant/assemble.ts';
import { trainFacts } from '../plant/facts.ts';

/** The plant as understood, for `summary.json`. */
export function plantFacts(plant: Plant): object {
  return {
    solutes: plant.scenario.solutes,
    species: plant.scenario.species,
    states: plant.system.places.length,
    trains: trainFacts(plant).map((f) => ({
      train: f.train,
      stages: f.stages,
      aqueous_m3_per_s: f.aqueous,
      organic_m3_per_s: f.organic,
      organic_to_aqueous: f.ratio,
      mixer_residence_s: f.mixerResidence,
      aqueous_held_m3: f.held.aqueous,
      organic_held_m3: f.held.organic,
      aqueous_turnover_s: f.held.aqueous / f.aqueous,
      organic_turnover_s: f.held.organic / f.organic,
      settler_specific_flow_m_per_s: f.specificFlow,
    })),
  };
}
