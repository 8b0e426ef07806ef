import type { RunFigures } from '../study/rehearse/figures.ts';
import type { FrequencyView } from '../study/rehearse/frequency.ts';
import type { StartSizeMap } from '../study/rehearse/map.ts';
import type { AnswerResult, RehearseResult } from '../study/rehearse/rehearse.ts';
import type { Kept } from '../study/rehearse/scan.ts';
import { cautions } from './cautions.ts';
import { loopFigures } from './loop-summary.ts';
import { plantFacts } from './plant-facts.ts';
import { changeWords, upsetWords } from './rehearse-words.ts';
import { head, type Origin, SCHEMA, si } from './summary.ts';

/** What `rehearse` was asked and found; SI, with the unit at the end of each key; times from the start of the run. */
export function rehearseSummary(r: RehearseResult, origin: Origin, map: StartSizeMap | null = null): object {
  const { ground: g, plant } = r;
  const zero = r.scenario.rehearsing?.timeZero ?? null;
  return {
    schema: SCHEMA,
    verb: 'rehearse',
    ...head(r.scenario, origin),
    complete: r.stop.reason === 'reached-end',
    start: typeof r.scenario.start === 'object' ? 'saved' : r.scenario.start,
    time_zero: zero === null ? null : new Date(zero).toISOString().slice(0, 16),
    horizon_s: g.horizon,
    upsets: g.upsets.map((u, i) => ({
      change: upsetWords(r)[i] ?? u.words,
      begins_s: u.begins,
      over_s: u.ends,
    })),
    varies: (r.scenario.rehearsing?.variations ?? []).map((v) => v.words),
    moving_at_the_upset: { quantity: g.moving.path, share_per_hour: g.moving.perHour },
    chief_limit: r.chief,
    nothing: figuresOf(r, r.nothing),
    answers: r.answers.map((a, i) => answerOf(r, a, i)),
    unaided: {
      sizes: r.unaided.sizes?.map(stretch) ?? null,
      durations: r.unaided.durations.map(stretch),
      duration_s: r.duration,
    },
    who_can_know: r.knowledge.map((k) => ({
      source: k.instrument,
      quantity: k.quantity,
      warn_kg_per_m3: k.warn,
      earliest_s: k.earliest,
      latest_s: k.latest,
      false_alarms: k.falseAlarms,
      in_hand: r.answers.map((a) => ({
        answer: a.answer.name,
        at_best_s: a.latest === null || k.earliest === null ? null : a.latest - k.earliest,
        at_worst_s: a.latest === null || k.latest === null ? null : a.latest - k.latest,
      })),
    })),
    frequency: r.frequency && frequencyOf(r.frequency),
    map: map && mapOf(map),
    plant: plantFacts(plant),
    solver: {
      integrator: r.settings.integrator,
      relative_tolerance: r.settings.tolerance,
      steps: r.steps,
      seconds: origin.seconds,
    },
    cautions,
  };
}

const stretch = (k: Kept): object => ({
  from: k.from,
  to: k.to,
  broken_below_from: k.fromBracket?.[0] ?? null,
  broken_above_to: k.toBracket?.[1] ?? null,
});

const figuresOf = (r: RehearseResult, f: RunFigures): object => ({
  kept: f.kept,
  outside_s: f.outside,
  beyond_kg: f.beyond,
  extra_organic_m3: f.extraSolvent,
  cost: f.cost,
  currency: r.scenario.commissioning?.prices?.currency ?? null,
  limits: f.limits.map((l) => ({
    keep: l.path,
    side: l.limit.side,
    limit: l.limit.value,
    unit: si(l.unit),
    kept: l.kept,
    over_before_the_upset: l.overBefore,
    broken_s: l.breaks?.time ?? null,
    broken_after_upset_s: l.breaks?.after ?? null,
    upset: l.breaks?.upset ?? null,
    back_s: l.back,
    still_over_at_the_end: l.stillOver,
    spells: l.spells.map((q) => ({ from_s: q.from, to_s: q.to })),
    outside_s: l.outside,
    longest_s: l.longest,
    worst: l.worst.value,
    worst_time_s: l.worst.time,
    beyond_kg: l.beyond,
    more_than_without_upset_kg: l.more,
    out_of_spec_m3: l.volume,
    recovered_s: l.recovered,
    ends_elsewhere: l.goesElsewhere,
  })),
  tanks: f.tanks.map((t) => ({ tank: t.tank, least_m3: t.least, most_m3: t.most })),
  events: f.events.map((e) => ({ time_s: e.time, name: e.name, message: e.message })),
  loops: f.loops.map(loopFigures),
});

const answerOf = (r: RehearseResult, a: AnswerResult, i: number): object => ({
  rank: i + 1,
  name: a.answer.name,
  steps: a.answer.steps.map((s, k) => ({
    of: s.name,
    begins_s: a.plan.starts[k] ?? null,
    moves: s.moves.map(changeWords),
  })),
  ...figuresOf(r, a.figures),
  binds: a.binds,
  latest_start_s: a.latest,
  starts: a.bounds?.starts.map(stretch) ?? null,
  ends: a.bounds?.ends?.map(stretch) ?? null,
  sizes: a.bounds?.sizes?.map(stretch) ?? null,
  above_the_largest_size: a.bounds?.above ?? null,
  worst_at_once: a.worstAtOnce,
  added_events: a.added.map((e) => ({ time_s: e.time, name: e.name, message: e.message })),
});

const frequencyOf = (f: FrequencyView): object => ({
  input: f.input,
  input_unit: si(f.inputUnit),
  output: f.output,
  output_unit: si(f.outputUnit),
  period_s: f.periods,
  amplitude_ratio: f.ratios,
  lag_s: f.lags,
  lasting_ratio: f.lasting,
  half_gets_through_at_s: f.half,
  swing_of_the_upset: f.swing,
  reaches_the_limit_from_s: f.reaches,
});

const mapOf = (m: StartSizeMap): object => ({
  answer: m.answer,
  of: m.of,
  limit: m.limit,
  unit: si(m.unit),
  starts_s: m.starts,
  sizes: m.sizes,
  values: m.values,
});
