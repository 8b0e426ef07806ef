import { loopFiguresSchema } from './loop-schema.ts';
import { head, list, number, object, orNull, plant, type Schema, text, yes } from './schema-words.ts';
import { SCHEMA } from './summary.ts';

const maybe = (s: Schema): Schema => ({ anyOf: [s, { type: 'null' }] });
const time = (description: string): Schema => orNull(number(`${description}; null: not within the run`));

const stretch = object({
  from: number('kept from here'),
  to: number('to here'),
  broken_below_from: orNull(number('found broken just below; null: the scan begins there')),
  broken_above_to: orNull(number('found broken just above; null: the scan ends there')),
});
const events = list(object({ time_s: number('when'), name: text('which'), message: text('in words') }));

const figures: Record<string, Schema> = {
  kept: yes('all limits'),
  outside_s: number('over all limits'),
  beyond_kg: number('over all limits: ∫ Q·max(c − limit, 0) dt'),
  extra_organic_m3: number('pumped more than by doing nothing'),
  cost: orNull(number('by the prices stated; null without prices')),
  currency: orNull(text('of the prices')),
  limits: list(
    object({
      keep: text('quantity'),
      side: { enum: ['below', 'above'] },
      limit: number('in `unit`'),
      unit: text('SI'),
      kept: yes('from the first upset on'),
      over_before_the_upset: yes('then there is no time of break'),
      broken_s: time('first crossing after the first upset began'),
      broken_after_upset_s: time('since the upset began that it belongs to'),
      upset: orNull(number('number of that upset')),
      back_s: time('last return for good'),
      still_over_at_the_end: yes('of the run'),
      spells: list(object({ from_s: number('outside from'), to_s: orNull(number('until')) })),
      outside_s: number('in all'),
      longest_s: number('longest spell'),
      worst: number('in `unit`'),
      worst_time_s: number('when'),
      beyond_kg: orNull(number('beyond the limit')),
      more_than_without_upset_kg: orNull(number('that left with the stream')),
      out_of_spec_m3: orNull(number('that left while the limit was broken')),
      recovered_s: time('within 2 % of the largest departure for good'),
      ends_elsewhere: yes('inputs end elsewhere: recovery is to their new steady state'),
    }),
  ),
  tanks: list(object({ tank: text('name'), least_m3: number('held'), most_m3: number('held') })),
  events,
  loops: loopFiguresSchema,
};

/** What `rehearse` writes. */
export const rehearse = object({
  schema: { const: SCHEMA, description: 'number of this schema' },
  verb: { const: 'rehearse' },
  ...head,
  start: { enum: ['barren', 'steady', 'empty', 'saved'] },
  time_zero: orNull(text("the plant's clock at the start of the run")),
  horizon_s: number('time asked for'),
  upsets: list(
    object({ change: text('in words'), begins_s: number('when'), over_s: time('return complete') }),
  ),
  varies: list(text('random variations in words')),
  moving_at_the_upset: object({
    quantity: text('that still moves most'),
    share_per_hour: number('relative change as the upset begins'),
  }),
  chief_limit: number('index of the limit that matters most'),
  nothing: object(figures),
  answers: list(
    object({
      rank: number('1 is the best'),
      name: text('as stated'),
      steps: list(
        object({
          of: text('answer that the step is'),
          begins_s: time('as planned'),
          moves: list(text('in words')),
        }),
      ),
      ...figures,
      binds: { enum: ['lateness', 'too late', 'size', 'neither', 'never begun'] },
      latest_start_s: time('end of the first stretch of starts'),
      starts: maybe(list(stretch)),
      ends: maybe(list(stretch)),
      sizes: maybe(list(stretch)),
      above_the_largest_size: orNull(text('event that ends the first stretch of sizes')),
      worst_at_once: maybe(list(number('by limit, begun at the earliest'))),
      added_events: events,
    }),
  ),
  unaided: object({
    sizes: maybe(list(stretch)),
    durations: list(stretch),
    duration_s: number('to which factors on the duration refer'),
  }),
  who_can_know: list(
    object({
      source: text('analyser or laboratory'),
      quantity: text('that it measures'),
      warn_kg_per_m3: orNull(number('level; null: any departure beyond its noise')),
      earliest_s: time('with the luckiest moment of sampling'),
      latest_s: time('with the unluckiest'),
      false_alarms: number('share of results that warn without any upset'),
      in_hand: list(
        object({
          answer: text('name'),
          at_best_s: orNull(number('latest start less earliest knowledge')),
          at_worst_s: orNull(number('latest start less latest knowledge')),
        }),
      ),
    }),
  ),
  frequency: maybe(
    object({
      input: text('path'),
      input_unit: text('SI'),
      output: text('path'),
      output_unit: text('SI'),
      period_s: list(number('rising')),
      amplitude_ratio: list(number('output over input')),
      lag_s: list(number('output after input')),
      lasting_ratio: number('of a lasting change'),
      half_gets_through_at_s: orNull(number('period')),
      swing_of_the_upset: number('amplitude in the unit of the input'),
      reaches_the_limit_from_s: orNull(number('period; null: at none')),
    }),
  ),
  map: maybe(
    object({
      answer: text('name'),
      of: { enum: ['worst', 'time'] },
      limit: number('of the quantity mapped, in `unit`; 0 for the time out of limit'),
      unit: text('SI'),
      starts_s: list(number('columns')),
      sizes: list(number('rows: factors on the answer as written')),
      values: list(list(number('by size and start'))),
    }),
  ),
  plant,
  solver: object({
    integrator: text('method'),
    relative_tolerance: number(''),
    steps: number('of the run in which nothing is done'),
    seconds: number('of computation'),
  }),
  cautions: text('read them'),
});
