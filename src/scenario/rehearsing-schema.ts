import type { z } from 'zod';
import { analyserSchema } from './analyser.ts';
import { figure, later, list, notNegative, object, positive, record, text, whole } from './fields.ts';

const WHEN = "a condition such as 'AT-101 above 0.80 g/L, then after 5 min'";

/** Keys of a scenario that `rehearse` reads. `upset` is one change as upsets have it. */
export function rehearsingKeys<U extends z.ZodRawShape>(upset: z.ZodObject<U>) {
  const move = object({
    ...upset.shape,
    at: figure(['a time'], notNegative)
      .optional()
      .describe('from the start of the answer; at once by default'),
  });
  const answer = object({
    start: later("a start such as '40 min after upset'").optional(),
    when: text().optional().describe(WHEN),
    ends: text().optional().describe("when its moves are taken back, such as '4 h after start'"),
    moves: list(move, 'a list of moves').optional(),
    sequence: list(text(), 'a list of names of answers').optional(),
    between: figure(['a time'], notNegative)
      .optional()
      .describe('what one operator needs from one answer of a sequence to the next'),
  });
  const instrument = object({
    of: text().describe('the quantity that it measures'),
    warn: later("a level such as '0.80 g/L'").optional(),
    ...analyserSchema.shape,
  });
  const variation = object({
    change: text(),
    deviation: later("a standard deviation such as '3 %' or '0.1 g/L'"),
    correlation_time: figure(['a time'], positive),
    every: figure(['a time'], positive).optional(),
    seed: whole(0, 2_000_000_000).optional(),
  });
  return {
    time_zero: text().optional().describe("clock time at the start, such as '2026-03-01 06:00'"),
    answers: record(answer, 'answers by name').optional(),
    analysers: record(instrument, 'analysers by name').optional(),
    variation: list(variation, 'a list of random variations').optional(),
  };
}
