import { commission } from './commission-schema.ts';
import { loopsAtRestSchema, loopsOfRunSchema } from './loop-schema.ts';
import { rehearse } from './rehearse-schema.ts';
import { figures, head, list, number, object, orNull, plant, text, yes } from './schema-words.ts';
import { SCHEMA } from './summary.ts';
import { tune } from './tune-schema.ts';

const trainFigures = object({
  train: text('name'),
  advance_organic_to_aqueous: number('as they pass through'),
  solvent_lost_m3_per_s: number('with the aqueous outlet'),
  solvent_lost_m3_per_m3_aqueous: number('of the aqueous outlet'),
  aqueous_held_s: orNull(number('all that the train holds by all that enters it')),
  organic_held_s: orNull(number('likewise')),
  efficiency_side: orNull(text('the side that the stage efficiencies are of; null where the stages differ')),
  stages: list(
    object({
      mixer_organic_to_aqueous: orNull(number('recycle and carry-over included')),
      mixer_residence_s: orNull(number('of all that enters')),
      aqueous_held_s: orNull(number('in mixer and settler')),
      organic_held_s: orNull(number('in mixer and settler')),
      settler_load_m_per_s: orNull(number('all that enters over the area')),
    }),
  ),
  solutes: list(
    object({
      solute: text('name'),
      transferred_kg_per_s: number('from the aqueous to the organic'),
      recovery: number('share of what enters with the phase that gives'),
      net_transfer_kg_per_m3: number('loaded less lean organic'),
      share_of_maximum_load: orNull(number('null where the law has no ceiling')),
      stage_efficiency: list(orNull(number('Murphree, on the side that the mixer is stated for'))),
    }),
  ),
  separation: orNull(
    object({
      share_of_maximum_load: orNull(number('all solutes together, of the loaded organic')),
      factors: list(
        object({
          of: text('the solute that is extracted more strongly'),
          over: text('the other one'),
          stages: list(orNull(number('ratio of the distribution ratios in each mixer'))),
        }),
      ),
      crowding: list(
        object({
          solute: text('name'),
          share_of_alone: orNull(
            number('equilibrium loading beside the others over that of the solute alone, at the loaded end'),
          ),
        }),
      ),
    }),
  ),
});

const run = object({
  schema: { const: SCHEMA, description: 'number of this schema' },
  verb: { const: 'run' },
  ...head,
  stop: object({
    reason: text('kind of stop'),
    time_s: number('time reached'),
    message: text('in words, with what to do'),
  }),
  horizon_s: number('time asked for'),
  record_every_s: number('distance of records'),
  records: number('rows in series.csv'),
  closure: figures(
    '|held(t) − held(0) − in + out| / (in + held(0)) for every solute, species carrier and phase',
  ),
  balances: list(
    object({
      of: text('solute, species carrier or phase'),
      unit: { enum: ['kg', 'm3'] },
      entered: number('over the boundary'),
      left: number('over the boundary'),
      held_before: number('at time zero'),
      held_after: number('at the end'),
      closure: number('relative'),
    }),
  ),
  limits: list(
    object({
      keep: text('quantity'),
      side: { enum: ['below', 'above'] },
      limit: number('in `unit`'),
      unit: text('SI'),
      kept: yes('never outside'),
      outside_from_the_start: yes('outside at time zero'),
      spells: list(
        object({
          from_s: number('outside from'),
          to_s: orNull(number('until; null: still outside at the end')),
        }),
      ),
      outside_s: number('in all'),
      beyond_kg: orNull(number('∫ Q·max(c − limit, 0) dt; null where that has no meaning')),
      worst: orNull(number('in `unit`; null where it was never judged')),
      worst_time_s: number('when'),
    }),
  ),
  upsets: list(
    object({ change: text('in words'), from_s: number('begins'), to_s: number('over, ramps included') }),
  ),
  clamped_at_zero: list(object({ quantity: text('input'), time_s: number('held at zero from') })),
  events: list(object({ time_s: number('when'), name: text('which'), message: text('in words') })),
  final: figures('every output at the end, key `path [unit]`'),
  figures: list(trainFigures),
  loops: loopsOfRunSchema,
  plant,
  solver: object({
    integrator: text('method'),
    relative_tolerance: number(''),
    work: { type: 'object', additionalProperties: { type: 'integer' }, description: 'counts by cause' },
    seconds: number('of computation'),
  }),
  cautions: text('read them'),
});

const steady = object({
  schema: { const: SCHEMA, description: 'number of this schema' },
  verb: { const: 'steady' },
  ...head,
  values: figures('every output at steady state, key `path [unit]`'),
  figures: list(trainFigures),
  used_up: list(
    object({ stage: text('train.stage'), species: text('that is taken up more than there is of it') }),
  ),
  loops: loopsAtRestSchema,
  drifts: list(
    object({
      tank: text('name'),
      gain_m3_per_s: number('of volume'),
      until_full_or_empty_s: number('from time zero'),
    }),
  ),
  closure: figures('imbalance over the boundary less what drifting tanks gain, relative to what enters'),
  plant,
  solver: object({
    iterations: number(''),
    residual_per_s: number('relative to contents'),
    seconds: number('of computation'),
  }),
  cautions: text('read them'),
});

/** JSON Schema (2020-12) of `summary.json`. */
export const summarySchema = {
  $schema: 'https://json-schema.org/draft/2020-12/schema',
  title: 'Upsettle summary.json',
  oneOf: [run, steady, commission, rehearse, tune],
} as const;
