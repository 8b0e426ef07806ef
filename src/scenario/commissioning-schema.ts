import { z } from 'zod';
import {
  between,
  figure,
  later,
  list,
  notNegative,
  object,
  oneOf,
  positive,
  record,
  text,
  word,
} from './fields.ts';

const STARTS = ['barren', 'steady', 'empty'] as const;
const PRICE = "a price such as '2400 AUD/m^3'";

/**
 * Keys of a scenario that `commission` reads. `upset` is one change as upsets have it, `content` the concentrations by
 * name, `start` what a phase of a train may hold at the start.
 */
export function commissioningKeys<U extends z.ZodRawShape, C extends z.ZodRawShape, S extends z.ZodType>(
  upset: z.ZodObject<U>,
  content: C,
  start: S,
) {
  const move = object({
    ...upset.shape,
    at: figure(['a time'], notNegative).optional().describe('from the start; at once by default'),
  });
  const holds = object({
    ...content,
    filled: figure(['a percentage', 'a volume'], positive).optional(),
    aqueous: start.optional(),
    organic: start.optional(),
  });
  const procedure = object({
    from: z
      .union([word(STARTS), object({ saved: text() })], {
        error: (i) => oneOf(i, [...STARTS, '{saved: file}']),
      })
      .optional()
      .describe('the state that it starts from'),
    initial: record(holds, 'what a tank or a train holds at the start, by its name').optional(),
    moves: list(move, 'a list of moves').optional(),
  });
  return {
    samples: object({
      repeatability: figure(['a percentage'], between(0, 1, '0 and 100 %')).describe(
        'two results on one stream differ by less, 95 times of 100',
      ),
      gap: figure(['a time'], positive).describe('between two samples'),
    }).optional(),
    prices: record(later(PRICE), 'prices by feed, outlet, solute or energy').optional(),
    procedures: record(procedure, 'procedures by name').optional(),
    uncertain: record(later("a range such as '±20 %'"), 'ranges by input').optional(),
    compare: object({
      file: text(),
      time: text().optional().describe('column of the time; the first by default'),
      at: figure(['a time'], notNegative)
        .optional()
        .describe('when the clock of the file begins, from the start'),
      columns: record(text(), 'columns by quantity'),
    }).optional(),
  };
}
