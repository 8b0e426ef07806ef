import type { CommissionResult } from '../study/commission/commission.ts';
import type { Ensemble, Spread } from '../study/commission/ensemble.ts';
import type { ComesGood } from '../study/commission/good.ts';
import type { StartResult } from '../study/commission/procedures.ts';
import type { Waiting } from '../study/commission/waiting.ts';
import { cautions } from './cautions.ts';
import { loopsAtRest } from './loop-summary.ts';
import { plantFacts } from './plant-facts.ts';
import { head, type Origin, SCHEMA, si } from './summary.ts';

/** What `commission` was asked and found; SI, with the unit at the end of each key; null where a time does not come. */
export function commissionSummary(r: CommissionResult, origin: Origin): object {
  const { followed, plant } = r;
  const { rest } = followed;
  const solutes = plant.scenario.solutes;
  return {
    schema: SCHEMA,
    verb: 'commission',
    ...head(plant.scenario, origin),
    complete: followed.stop.reason === 'reached-end',
    start: typeof plant.scenario.start === 'object' ? 'saved' : plant.scenario.start,
    begins_with_the_start: r.begun,
    left_out: r.leftOut,
    horizon_s: followed.asked,
    ran_s: followed.ran,
    extended: r.extended,
    steady_state: 'state' in rest,
    no_steady_state_because: 'state' in rest ? null : rest.reason,
    settled: followed.settled,
    steady_s: r.steady,
    within_1_percent_of_final_s: r.nearFinal,
    on_spec_s: r.onSpec,
    limits: r.limits.map((l) => ({
      keep: l.path,
      side: l.limit.side,
      limit: l.limit.value,
      unit: si(l.unit),
      kept_for_good_from_s: l.from,
      never_outside: l.neverOutside,
      first_turnover_s: l.turned,
      at_rest: l.final,
    })),
    drifts:
      'state' in rest
        ? rest.drifts.map((d) => ({ tank: d.tank, gain_m3_per_s: d.rate, full_or_empty_at_s: d.until }))
        : [],
    loops_at_rest: 'state' in rest ? loopsAtRest(rest.loops) : [],
    comes_good: r.quantities.map(goodOf),
    modes: r.modes.map((m) => ({
      time_constant_s: m.time,
      period_s: m.period,
      of: m.of,
      lives_in: m.lives.map((q) => ({ where: q.where, share: q.share })),
    })),
    tail: r.tail && { quantity: r.tail.path, falls_by_e_in_s: r.tail.seen },
    waiting: waitingOf(r.plain.waiting, solutes),
    samples: r.samples && {
      repeatability: r.samples.repeatability,
      gap_s: r.samples.gap,
      trusted: r.samples.trusted.map((q) => ({ quantity: q.path, from_s: q.from })),
      two_equal_samples_of: r.samples.last,
      pairs: r.samples.pairs.map((q) => ({
        gap_s: q.gap,
        equal_from_s: q.equalFrom,
        left: q.left,
        left_at_most_about: q.allowed,
      })),
      points: r.samples.points,
      plan: r.samples.times.map((t, i) => ({ at_s: t, expected_kg_per_m3: r.samples?.expected[i] })),
    },
    starts: r.starts.map((q) => startOf(q, solutes)),
    ensemble: r.ensemble && ensembleOf(r.ensemble),
    comparison: r.comparison && {
      file: r.comparison.file,
      outlets: r.comparison.columns.map((c) => ({
        quantity: c.path,
        unit: si(c.unit),
        samples: c.times.length,
        bias: c.bias,
        rmse: c.rmse,
        mean_of_plant: c.mean,
      })),
    },
    events: followed.events.map((e) => ({ time_s: e.time, name: e.name, message: e.message })),
    plant: plantFacts(plant),
    solver: {
      integrator: r.run.integrator,
      relative_tolerance: r.run.tolerance,
      steps: followed.steps,
      seconds: origin.seconds,
    },
    cautions,
  };
}

const goodOf = (q: ComesGood): object => ({
  quantity: q.quantity.path,
  kind: q.quantity.kind,
  start_kg_per_m3: q.start,
  final_kg_per_m3: q.final,
  change_kg_per_m3: q.change,
  within_10_5_2_1_percent_of_change_s: q.ofChange,
  within_10_5_2_1_percent_of_final_s: q.ofFinal,
  within_repeatability_s: q.repeatable,
  overshoot_share_of_change: q.overshoot?.share ?? null,
  overshoot_s: q.overshoot?.time ?? null,
  turnover_s: q.turnover,
});

const waitingOf = (w: Waiting, solutes: readonly string[]): object => ({
  until_s: w.until,
  outlets: w.outlets.map((o) => ({
    outlet: o.outlet,
    until_s: o.until,
    by: o.by,
    off_spec_m3: o.volume,
    solutes_kg: Object.fromEntries(solutes.map((n, k) => [n, o.solutes[k]])),
  })),
  solvent_fed_m3: w.solventFed,
  solvent_lost_m3: w.solventLost,
  energy_J: w.energy,
  currency: w.currency,
  costs: w.costs.map((c) => ({ of: c.of, amount: c.amount })),
});

const startOf = (q: StartResult, solutes: readonly string[]): object => ({
  name: q.name,
  on_spec_s: q.onSpec,
  steady_s: q.steady,
  settled: q.settled,
  ends_elsewhere: q.endsElsewhere.map((e) => ({ outlet: e.path, final_kg_per_m3: e.final })),
  waiting: waitingOf(q.waiting, solutes),
});

const spread = (s: Spread): object => ({ p10_s: s.p10, p50_s: s.p50, p90_s: s.p90 });

const ensembleOf = (e: Ensemble): object => ({
  runs: e.runs,
  asked: e.asked,
  seed: e.seed,
  inputs: e.inputs.map((u) => ({ input: u.path, half_width: u.share })),
  steady: spread(e.steady),
  on_spec: e.onSpec && spread(e.onSpec),
  unsettled: e.unsettled,
  never_on_spec: e.offSpec,
  failed: e.failed,
  influence: e.influence.map((q) => ({ input: q.path, rank_correlation: q.correlation })),
});
