import type { Margins } from '../control/margins.ts';
import type { Fopdt, Settings } from '../control/rules.ts';
import type { MapPoint } from '../study/tune/map.ts';
import type { Proof } from '../study/tune/prove.ts';
import type { Tested } from '../study/tune/step-test.ts';
import type { TuneResult } from '../study/tune/tune.ts';
import { cautions } from './cautions.ts';
import { loopsAtRest } from './loop-summary.ts';
import { head, type Origin, SCHEMA, si } from './summary.ts';
import { verdict } from './tune-screen.ts';

/** JSON has no infinity: what has no bound is null. */
const finite = (v: number): number | null => (Number.isFinite(v) ? v : null);

/** What `tune` was asked and found; SI, with the unit at the end of each key. */
export function tuneSummary(r: TuneResult, origin: Origin): object {
  const { plant, loops } = r.joined;
  const { loop } = loops[r.loop];
  const start = {
    schema: SCHEMA,
    verb: 'tune',
    ...head(plant.scenario, origin),
    complete: true,
    loop: loop.name,
    output_unit: { ratio: '', flow: 'm3/s', 'set point': 'kg/m3' }[loop.move.kind],
    at_rest: loopsAtRest([r.atRest])[0],
  };
  const end = { seconds: origin.seconds, cautions };
  if (r.kind === 'unreachable') return { ...start, tuned: null, ...end };
  const { forms, map, backOff: b } = r;
  return {
    ...start,
    tuned: {
      use: r.best.name,
      action: loop.controller.action,
      standard: settings(forms.standard),
      parallel: {
        proportional: forms.parallel.proportional,
        integral_per_s: forms.parallel.integral,
        derivative_s: forms.parallel.derivative,
      },
      series: forms.series && settings(forms.series),
      repeats_per_minute: forms.repeatsPerMinute,
      per_cent_gain: forms.percentGain,
      proportional_band_per_cent: forms.proportionalBand,
      plant: {
        gain_at_rest: r.point.restGain,
        gain_after_one_hour: r.point.hourGain,
        fitted: { ...model(r.point.fit), relative_error: r.point.fit.error },
        chosen_by: model(r.model),
      },
      step_tests: [...r.tests, ...(r.real ? [r.real] : [])].map(testOf),
      candidates: r.candidates.map((c) => ({
        name: c.name,
        reference_only: c.reference,
        ...settings(c.settings),
        ...marginsOf(c.margins),
        verdict: verdict(c),
      })),
      sensitivity_asked: r.sensitivity,
      optimum_binds: r.optimum.binds,
      proofs: r.proofs.map(proofOf),
      map: {
        throughput: map.throughput,
        grade: map.grade,
        sign_changes: map.signChanges.length,
        unsafe: map.unsafe.length,
        points: map.points.map(pointOf),
      },
      responses: {
        rad_per_s: r.responses.omegas,
        list: r.responses.list.map((q) => ({
          from: q.from,
          from_unit: si(q.fromUnit),
          to: q.to,
          to_unit: si(q.toUnit),
          gain_at_rest: q.restGain,
          gain_after_one_hour: q.hourGain,
          magnitude: q.magnitudes,
          angle_rad: q.angles,
        })),
      },
      feedforward: r.ahead.map((a) => ({
        from: a.from,
        static_gain: a.gain,
        lead_s: a.lead,
        lag_s: a.lag,
        late_s: a.late,
        realisable: a.realisable,
        analyser_assumed: a.assumed,
        proof: proofOf(a.proof),
        proof_with_lead_lag: proofOf(a.shaped),
      })),
      back_off: b && {
        limit_kg_per_m3: b.limit,
        set_point_kg_per_m3: b.setPoint,
        worst_kg_per_m3: finite(b.worst),
        noise_sigma_kg_per_m3: b.sigma,
        more_output: finite(b.output),
        more_flow_m3_per_s: finite(b.flow),
      },
    },
    ...end,
  };
}

const settings = (s: Settings): object => ({
  gain_per_kg_per_m3: s.gain,
  integral_time_s: s.integralTime,
  derivative_time_s: s.derivativeTime,
});

const model = (p: Fopdt): object => ({ gain: p.gain, lag_s: p.lag, delay_s: p.delay });

const marginsOf = (m: Margins): object => ({
  stable: m.stable,
  gain_margin: finite(m.gain),
  phase_margin_deg: finite(m.phase),
  delay_margin_s: finite(m.delay),
  sensitivity: finite(m.sensitivity),
});

const testOf = (t: Tested): object => ({
  name: t.name,
  step: t.test.step,
  least_squares: t.fit && { ...model(t.fit), relative_error: t.fit.error },
  smith: t.smith && model(t.smith),
  sundaresan_krishnaswamy: t.sundaresanKrishnaswamy && model(t.sundaresanKrishnaswamy),
});

const proofOf = (p: Proof): object => ({
  name: p.name,
  complete: p.trial.complete,
  iae_kg_s_per_m3: p.iae,
  worst_kg_per_m3: p.worst,
  outside_s: p.outside,
  beyond_kg: p.beyond,
  travel: p.travel,
  solvent_over_manual_m3: p.solvent,
  at_limit_share: p.atLimit,
  slewing_share: p.slewing,
  steps: p.trial.steps,
  moves: p.trial.moves,
  set_point_step: p.step && {
    from_kg_per_m3: p.step.from,
    to_kg_per_m3: p.step.to,
    overshoot_share: p.step.overshoot,
    settling_s: p.step.settling,
    iae_kg_s_per_m3: p.step.iae,
  },
});

const pointOf = (p: MapPoint): object => ({
  output: p.output,
  throughput_share: p.throughput,
  grade_share: p.grade,
  measurement_kg_per_m3: finite(p.measurement),
  gain: p.gain,
  lag_s: p.lag,
  delay_s: p.delay,
  margins: p.margins && marginsOf(p.margins),
  local_simc: p.local && settings(p.local),
});
