/*
 * Upsettle for other programs: read a scenario, change it, compute it. Pictures and screens are not part of it.
 */
export { findStartUp, findSteady, simulate } from './compute.ts';
export { NotCompleted, ScenarioRefused } from './errors.ts';
export { readScenario, readScenarioFile, Scenario } from './scenario.ts';
export type {
  ComesGood,
  Complaint,
  LimitOutcome,
  PlantEvent,
  Quantity,
  Setting,
  SimulateOptions,
  Simulation,
  StartUp,
  SteadyState,
  TrainAtRest,
} from './types.ts';
