import { loopsAtRestSchema } from './loop-schema.ts';
import { head, list, number, object, orNull, type Schema, text, yes } from './schema-words.ts';
import { SCHEMA } from './summary.ts';

const settings = {
  gain_per_kg_per_m3: number('Kc: output per kg/m3'),
  integral_time_s: number('Ti'),
  derivative_time_s: number('Td'),
};
const model = {
  gain: number('kg/m3 per output'),
  lag_s: number('T'),
  delay_s: number('theta'),
};
const fitted = object({ ...model, relative_error: number('r.m.s. of what the model is off') });
const margins = {
  stable: yes('the other margins say nothing without'),
  gain_margin: orNull(number('null: none')),
  phase_margin_deg: orNull(number('null: none')),
  delay_margin_s: orNull(number('null: none')),
  sensitivity: orNull(number('Ms, largest |1/(1 + L)|')),
};
const proof = object({
  name: text('of the candidate'),
  complete: yes('the run reached its horizon'),
  iae_kg_s_per_m3: number('integral of |PV - SP|'),
  worst_kg_per_m3: number('highest measurement'),
  outside_s: number('outside of limits on concentrations'),
  beyond_kg: number('above limits'),
  travel: number('sum of all moves of the output'),
  solvent_over_manual_m3: number('moved beyond what manual moves'),
  at_limit_share: number('of the time in automatic'),
  slewing_share: number('of the time in automatic'),
  steps: number('of the integrator'),
  moves: number('moments at which the loop could move'),
  set_point_step: orNull(
    object({
      from_kg_per_m3: number('set point before'),
      to_kg_per_m3: number('set point after'),
      overshoot_share: number('of the step'),
      settling_s: orNull(number('until within 5 % for good; null: not within the run')),
      iae_kg_s_per_m3: number('integral of |PV - SP|'),
    }),
  ),
});

const found: Schema = object({
  use: text('name of the candidate to use'),
  action: { enum: ['direct', 'reverse'] },
  standard: object(settings),
  parallel: object({
    proportional: number('Kp'),
    integral_per_s: number('Ki'),
    derivative_s: number('Kd'),
  }),
  series: orNull(object(settings)),
  repeats_per_minute: number('1/Ti'),
  per_cent_gain: orNull(number('per cent of output span per per cent of measurement span')),
  proportional_band_per_cent: orNull(number('100 over that')),
  plant: object({
    gain_at_rest: orNull(number('exact; null: something only integrates')),
    gain_after_one_hour: number('exact'),
    fitted,
    chosen_by: object(model),
  }),
  step_tests: list(
    object({
      name: text('up, down, or real'),
      step: number('of the output'),
      least_squares: orNull(fitted),
      smith: orNull(object(model)),
      sundaresan_krishnaswamy: orNull(object(model)),
    }),
  ),
  candidates: list(
    object({
      name: text('of the rule'),
      reference_only: yes('never put forward'),
      ...settings,
      ...margins,
      verdict: text('in a word'),
    }),
  ),
  sensitivity_asked: number('bound of the own optimum'),
  optimum_binds: text('what keeps the own optimum from being faster'),
  proofs: list(proof),
  map: object({
    throughput: orNull(text('input that stands for it')),
    grade: orNull(text('input that stands for it')),
    sign_changes: number('points at which the gain has the other sign'),
    unsafe: number('points at which the chosen settings have Ms above 2 or are unstable'),
    points: list(
      object({
        output: number('held'),
        throughput_share: number('of the stated'),
        grade_share: number('of the stated'),
        measurement_kg_per_m3: orNull(number('at rest')),
        gain: orNull(number('null: no steady state')),
        lag_s: number('fitted'),
        delay_s: number('fitted'),
        margins: orNull(object(margins)),
        local_simc: orNull(object(settings)),
      }),
    ),
  }),
  responses: object({
    rad_per_s: list(number('frequency')),
    list: list(
      object({
        from: text('input: what a loop moves, a wild flow, or what an upset changes'),
        from_unit: text('SI'),
        to: text('what a loop measures'),
        to_unit: text('SI'),
        gain_at_rest: orNull(number('null: something only integrates')),
        gain_after_one_hour: number('of a step'),
        magnitude: list(number('by frequency, all loops held')),
        angle_rad: list(number('by frequency')),
      }),
    ),
  }),
  feedforward: list(
    object({
      from: text('disturbance'),
      static_gain: number('output per unit of it'),
      lead_s: number('of the ideal'),
      lag_s: number('of the ideal'),
      late_s: number('by how much the ideal would have to act sooner'),
      realisable: yes('the ideal can be had'),
      analyser_assumed: yes('none is stated for it'),
      proof,
      proof_with_lead_lag: proof,
    }),
  ),
  back_off: orNull(
    object({
      limit_kg_per_m3: number('limit'),
      set_point_kg_per_m3: orNull(number('that keeps it; null: none found')),
      worst_kg_per_m3: orNull(number('there')),
      noise_sigma_kg_per_m3: number('of the outlet under noise alone'),
      more_output: orNull(number('at rest, than at the stated set point')),
      more_flow_m3_per_s: orNull(number('at rest')),
    }),
  ),
});

export const tune = object({
  schema: { const: SCHEMA, description: 'number of this schema' },
  verb: { const: 'tune' },
  ...head,
  loop: text('name'),
  output_unit: text('SI; empty for a ratio'),
  at_rest: loopsAtRestSchema.items as Schema,
  tuned: orNull(found),
  seconds: number('of computation'),
  cautions: text('read them'),
});
