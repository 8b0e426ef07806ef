import { z } from 'zod';
import { figure, list, missing, name, notNegative, object, phase, positive, record, word } from './fields.ts';
import type { Quantity } from './units.ts';

/*
 * Settings of what lies between and around the trains: streams that divide and run together, side feeds and draws,
 * other arrangements of the stages, and what a tank takes out.
 */

const belowAll = (q: Quantity): string | null => {
  if (!(q.value > 0)) return 'must be greater than 0';
  return q.kind === 'a percentage' && q.value >= 1 ? 'must be less than 100 %' : null;
};

const TAKE = "a share such as '40 %' or a flow such as '5 m^3/h'";
const take = figure(['a percentage', 'a flow by volume'], belowAll).describe(TAKE);

export const splits = record(
  record(
    z.union([z.literal('rest'), take], { error: (i) => missing(i, `expected ${TAKE}, or rest`) }),
    'branches by name',
  ),
  'what each stream is split into, by stream',
);

export const blends = record(
  list(name, 'a list of streams').min(2, { error: () => 'name two streams or more' }),
  'streams that run together, by name',
);

/** What differs in one stage, besides its vessels. */
export const stageStreams = {
  takes: z
    .union([name, list(name, 'a list of streams')], {
      error: (i) => missing(i, 'expected a stream or a list of streams'),
    })
    .optional()
    .describe('streams that enter the mixer of this stage'),
  draws: record(object({ phase, take }), 'streams drawn off, by name').optional(),
};

const part = figure(['a percentage'], positive);
const backFlow = figure(['a percentage'], notNegative).describe('of the flow onward of the same phase');

export const arrangement = {
  arrangement: word(['counter-current', 'cross-current', 'co-current']).optional(),
  fresh: phase
    .optional()
    .describe('cross-current: the phase that enters every stage fresh; organic by default'),
  shares: list(part, 'a list of shares such as [50 %, 30 %, 20 %]').optional(),
  back_flow: object({ aqueous: backFlow.optional(), organic: backFlow.optional() })
    .optional()
    .describe('stages without settlers: flow back to the neighbour'),
};

export const organicShare = figure(['a percentage'], belowAll)
  .optional()
  .describe('organic share of a mixer without a settler');

export const neutralises = record(
  figure(['a concentration'], positive),
  'concentrations by species',
).optional();

export const removes = record(
  figure(['a flow by mass', 'a percentage'], belowAll),
  "what is taken out, by solute: a rate such as '1200 kg/h' or a share such as '30 %'",
).optional();
