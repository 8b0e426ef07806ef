import { loopsAtRestSchema } from './loop-schema.ts';
import { head, list, number, object, orNull, plant, type Schema, text, yes } from './schema-words.ts';
import { SCHEMA } from './summary.ts';

const time = (description: string): Schema => orNull(number(`${description}; null: not within the run`));
const maybe = (s: Schema): Schema => ({ anyOf: [s, { type: 'null' }] });
const kilograms: Schema = {
  type: 'object',
  additionalProperties: { type: 'number' },
  description: 'kg by solute',
};

const waiting = object({
  until_s: number('until all outlets are good, or the end of what is counted'),
  outlets: list(
    object({
      outlet: text('name'),
      until_s: time('until it is good'),
      by: { enum: ['limit', 'change'], description: 'by its limits, or without any by 5 % of its change' },
      off_spec_m3: number('made until then'),
      solutes_kg: kilograms,
    }),
  ),
  solvent_fed_m3: number('organic from feeds'),
  solvent_lost_m3: number('organic carried away with aqueous outlets'),
  energy_J: orNull(
    number('agitators by their impellers, and the power stated with the prices; null: not known'),
  ),
  currency: text('of the prices'),
  costs: list(object({ of: text('what'), amount: number('in the currency') })),
});

const spread = object({ p10_s: time('10 of 100'), p50_s: time('50 of 100'), p90_s: time('90 of 100') });

/** What `commission` writes. */
export const commission = object({
  schema: { const: SCHEMA, description: 'number of this schema' },
  verb: { const: 'commission' },
  ...head,
  start: { enum: ['barren', 'steady', 'empty', 'saved'] },
  begins_with_the_start: list(text('changes at time zero that belong to the start')),
  left_out: list(text('later changes, which do not')),
  horizon_s: number('time asked for'),
  ran_s: number('time run'),
  extended: yes('the horizon asked for was too short for 1 %'),
  steady_state: yes('whether there is one'),
  no_steady_state_because: orNull(text('why not')),
  settled: yes('all quantities came within 1 % of their change for good'),
  steady_s: time('every outlet within 1 % of its change for good'),
  within_1_percent_of_final_s: time('every outlet within 1 % of its final value for good'),
  on_spec_s: time('all limits kept for good, by stream made of plant feed'),
  limits: list(
    object({
      keep: text('quantity'),
      side: { enum: ['below', 'above'] },
      limit: number('in `unit`'),
      unit: text('SI'),
      kept_for_good_from_s: time('not before the first aqueous turnover of its train'),
      never_outside: yes('only that turnover was waited for'),
      first_turnover_s: time('one aqueous inventory of its train has passed'),
      at_rest: orNull(number('final value, in `unit`')),
    }),
  ),
  drifts: list(
    object({
      tank: text('whose level does not come to rest'),
      gain_m3_per_s: number('of volume'),
      full_or_empty_at_s: number('from the start'),
    }),
  ),
  loops_at_rest: loopsAtRestSchema,
  comes_good: list(
    object({
      quantity: text('path of the output'),
      kind: { enum: ['outlet', 'stream', 'tank', 'stage'] },
      start_kg_per_m3: number('at the start'),
      final_kg_per_m3: orNull(number('from the steady solver')),
      change_kg_per_m3: orNull(number('final less start; null where it hardly moves')),
      within_10_5_2_1_percent_of_change_s: list(time('for good')),
      within_10_5_2_1_percent_of_final_s: list(time('for good')),
      within_repeatability_s: time('for good'),
      overshoot_share_of_change: orNull(number('farthest beyond the final value')),
      overshoot_s: orNull(number('when')),
      turnover_s: orNull(number('what its train or tank holds of its phase, over the flow')),
    }),
  ),
  modes: list(
    object({
      time_constant_s: number('falls by e; negative where it grows'),
      period_s: orNull(number('of a swing; null where none shows')),
      of: text('solute, species or levels'),
      lives_in: list(object({ where: text('vessels'), share: number('of what is on its way') })),
    }),
  ),
  tail: maybe(
    object({ quantity: text('comes good last'), falls_by_e_in_s: number('seen from 0.5 to 0.1 %') }),
  ),
  waiting,
  samples: maybe(
    object({
      repeatability: number('share of a result'),
      gap_s: number('between two samples'),
      trusted: list(
        object({ quantity: text('path'), from_s: time('drift below the repeatability for good') }),
      ),
      two_equal_samples_of: text('quantity'),
      pairs: list(
        object({
          gap_s: number('between the two'),
          equal_from_s: time('the second is taken'),
          left: orNull(number('deviation from the final value then, as a share of it')),
          left_at_most_about: number('repeatability/(exp(gap/slowest) − 1)'),
        }),
      ),
      points: list(text('where to sample')),
      plan: list(object({ at_s: number('when'), expected_kg_per_m3: list(number('by point')) })),
    }),
  ),
  starts: list(
    object({
      name: text('plain start or procedure; fastest first'),
      on_spec_s: time('all limits kept for good'),
      steady_s: time("every outlet within 1 % of the plain start's change for good"),
      settled: yes('it came to rest'),
      ends_elsewhere: list(
        object({
          outlet: text('left at another value than by the plain start'),
          final_kg_per_m3: number('at rest'),
        }),
      ),
      waiting,
    }),
  ),
  ensemble: maybe(
    object({
      runs: number('computed'),
      asked: number('asked for'),
      seed: number('of the Latin hypercube'),
      inputs: list(object({ input: text('path'), half_width: number('share of the stated value') })),
      steady: spread,
      on_spec: maybe(spread),
      unsettled: number('runs that came to no rest'),
      never_on_spec: number('runs that never kept the limits for good'),
      failed: number('runs that could not be started'),
      influence: list(
        object({ input: text('path'), rank_correlation: number('with the time to steady state') }),
      ),
    }),
  ),
  comparison: maybe(
    object({
      file: text('plant samples'),
      outlets: list(
        object({
          quantity: text('path'),
          unit: text('SI'),
          samples: number('compared'),
          bias: number('mean of model less plant'),
          rmse: number('root of the mean square of model less plant'),
          mean_of_plant: number('for scale'),
        }),
      ),
    }),
  ),
  events: list(object({ time_s: number('when'), name: text('which'), message: text('in words') })),
  plant,
  solver: object({
    integrator: text('method'),
    relative_tolerance: number(''),
    steps: number('of the run that was judged'),
    seconds: number('of computation'),
  }),
  cautions: text('read them'),
});
