import { explain } from '../solve/outcome.ts';
import type { RunResult, SteadyResult } from '../study/result.ts';
import type { TrainFigures } from '../study/train-figures.ts';
import { cautions } from './cautions.ts';
import { loopsAtRest, loopsOfRun } from './loop-summary.ts';
import { plantFacts } from './plant-facts.ts';

/** Raised when a key changes its meaning or goes away. */
export const SCHEMA = 1;

export interface Origin {
  readonly file: string;
  readonly version: string;
  /** s of computation. */
  readonly seconds: number;
}

/** What `run` was asked and found; SI, with the unit at the end of each key. */
export function runSummary(r: RunResult, origin: Origin): object {
  const s = r.plant.scenario;
  const outputs = r.plant.system.outputs;
  const last = r.records.rows[r.records.rows.length - 1];
  return {
    schema: SCHEMA,
    verb: 'run',
    ...head(r.plant.scenario, origin),
    complete: r.complete,
    stop: { reason: r.stop.reason, time_s: r.stop.time, message: explain(r.stop) },
    horizon_s: s.horizon,
    record_every_s: s.recordEvery,
    records: r.records.made,
    closure: Object.fromEntries(r.closures.map((c) => [c.name, c.closure])),
    balances: r.closures.map((c) => ({
      of: c.name,
      unit: c.unit === 'kg' ? 'kg' : 'm3',
      entered: c.entered,
      left: c.left,
      held_before: c.heldBefore,
      held_after: c.heldAfter,
      closure: c.closure,
    })),
    limits: r.limits.map((l) => ({
      keep: l.path,
      side: l.limit.side,
      limit: l.limit.value,
      unit: si(l.unit),
      kept: l.spells.length === 0,
      outside_from_the_start: l.atStart,
      spells: l.spells.map((q) => ({ from_s: q.from, to_s: q.to })),
      outside_s: l.outside,
      beyond_kg: l.beyond,
      worst: Number.isNaN(l.worst.value) ? null : l.worst.value,
      worst_time_s: l.worst.time,
    })),
    upsets: r.shades.map((q) => ({ change: q.words, from_s: q.from, to_s: q.to })),
    clamped_at_zero: r.clamped.map((c) => ({ quantity: c.quantity, time_s: c.time })),
    events: r.events.map((e) => ({ time_s: e.time, name: e.name, message: e.message })),
    final: Object.fromEntries(outputs.map((o, i) => [`${o.path} [${si(o.unit)}]`, last[i]])),
    figures: r.figures.map(figuresOf),
    loops: loopsOfRun(r.loops),
    plant: plantFacts(r.plant),
    solver: {
      integrator: r.integrator,
      relative_tolerance: r.tolerance,
      work: r.work,
      seconds: origin.seconds,
    },
    cautions,
  };
}

/** What `steady` found. */
export function steadySummary(r: SteadyResult, origin: Origin): object {
  const { outputs } = r.plant.system;
  return {
    schema: SCHEMA,
    verb: 'steady',
    ...head(r.plant.scenario, origin),
    complete: true,
    values: Object.fromEntries(outputs.map((o, i) => [`${o.path} [${si(o.unit)}]`, r.outputs[i]])),
    figures: r.figures.map(figuresOf),
    loops: loopsAtRest(r.loops),
    drifts: r.drifts.map((d) => ({ tank: d.tank, gain_m3_per_s: d.rate, until_full_or_empty_s: d.until })),
    used_up: r.usedUp.map((q) => ({ stage: q.stage, species: q.species })),
    closure: { steady_boundary: r.imbalance },
    plant: plantFacts(r.plant),
    solver: { iterations: r.iterations, residual_per_s: r.residual, seconds: origin.seconds },
    cautions,
  };
}

export function head(s: { title: string; about: string }, origin: Origin): object {
  return { title: s.title, about: s.about, scenario_file: origin.file, upsettle_version: origin.version };
}

export const si = (unit: string): string => unit.replaceAll('^', '');

/** What people look for in a train. */
const figuresOf = (f: TrainFigures): object => ({
  train: f.train,
  advance_organic_to_aqueous: f.advance,
  solvent_lost_m3_per_s: f.solventLost,
  solvent_lost_m3_per_m3_aqueous: f.specificLoss,
  aqueous_held_s: f.held.aqueous,
  organic_held_s: f.held.organic,
  efficiency_side: f.side,
  stages: f.stages.map((q) => ({
    mixer_organic_to_aqueous: q.mixerRatio,
    mixer_residence_s: q.mixerResidence,
    aqueous_held_s: q.aqueousHeld,
    organic_held_s: q.organicHeld,
    settler_load_m_per_s: q.settlerLoad,
  })),
  solutes: f.solutes.map((q) => ({
    solute: q.solute,
    transferred_kg_per_s: q.transferred,
    recovery: q.recovery,
    net_transfer_kg_per_m3: q.netTransfer,
    share_of_maximum_load: q.load,
    stage_efficiency: q.efficiency,
  })),
  separation:
    f.separation === null
      ? null
      : {
          share_of_maximum_load: f.separation.load,
          factors: f.separation.factors.map((q) => ({ of: q.one, over: q.other, stages: q.stages })),
          crowding: f.separation.crowding.map((q) => ({ solute: q.solute, share_of_alone: q.share })),
        },
});
