import { list, number, object, orNull, text, yes } from './schema-words.ts';

const output = 'a ratio without a unit, m3/s or kg/m3, by what the loop moves';

const figures = {
  name: text('of the loop'),
  automatic_at_end: yes('in automatic at the end'),
  output_at_end: number(output),
  measurement_at_end_kg_per_m3: number('the last result'),
  travel: number('sum of all moves of the output'),
  automatic_s: number('time in automatic'),
  at_limit_s: number('of that, output at a limit'),
  slewing_s: number('of that, output on its slew'),
};

export const loopFiguresSchema = list(object(figures));

export const loopsOfRunSchema = list(
  object({
    ...figures,
    results: list(object({ time_s: number('known from'), value_kg_per_m3: orNull(number('null: failed')) })),
  }),
);

export const loopsAtRestSchema = list(
  object({
    name: text('of the loop'),
    automatic: yes('in automatic'),
    measurement_kg_per_m3: number('at rest'),
    set_point_kg_per_m3: number('asked for'),
    output: number(output),
    binds: orNull(text('which limit of the output keeps it from its set point')),
  }),
);
