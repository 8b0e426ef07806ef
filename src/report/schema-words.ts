/** Words in which the JSON Schema of `summary.json` is put together. */
export type Schema = { readonly [key: string]: unknown };

export const number = (description: string): Schema => ({ type: 'number', description });
export const text = (description: string): Schema => ({ type: 'string', description });
export const yes = (description: string): Schema => ({ type: 'boolean', description });
export const orNull = (s: Schema): Schema => ({ ...s, type: [s.type, 'null'] });
export const list = (items: Schema): Schema => ({ type: 'array', items });
export const range = (description: string): Schema => ({
  type: ['array', 'null'],
  items: { type: 'number' },
  minItems: 2,
  maxItems: 2,
  description,
});
export const figures = (description: string): Schema => ({
  type: 'object',
  additionalProperties: { type: 'number' },
  description,
});
export const object = (properties: Record<string, Schema>): Schema => ({
  type: 'object',
  properties,
  required: Object.keys(properties),
  additionalProperties: false,
});

export const head = {
  title: text('title of the scenario'),
  about: text('what the scenario says of itself'),
  scenario_file: text('the file as it was named'),
  upsettle_version: text('version of the program'),
  complete: yes('false: the computation ended early; what was computed is here'),
};

/** The plant as understood. */
export const plant = object({
  solutes: list(text('name')),
  species: list(text('name')),
  states: number('number of states'),
  trains: list(
    object({
      train: text('name'),
      stages: number('number of stages'),
      aqueous_m3_per_s: number('aqueous flow at time zero'),
      organic_m3_per_s: number('organic flow at time zero'),
      organic_to_aqueous: number('ratio of the flows'),
      mixer_residence_s: range('least and most over the stages, both flows'),
      aqueous_held_m3: number('aqueous in all mixers and settlers'),
      organic_held_m3: number('organic in all mixers and settlers'),
      aqueous_turnover_s: number('held over flow'),
      organic_turnover_s: number('held over flow'),
      settler_specific_flow_m_per_s: range('both flows over the settler area; null where no area is given'),
    }),
  ),
});
