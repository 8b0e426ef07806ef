import { z } from 'zod';
import { type Analyser, analyserSchema } from './analyser.ts';
import {
  between,
  figure,
  later,
  missing,
  notNegative,
  number,
  object,
  positive,
  record,
  text,
  whole,
  word,
} from './fields.ts';
import type { Change } from './scenario.ts';

/** A control loop as it is stated; SI. */
export interface Loop {
  readonly name: string;
  readonly measure: Measure;
  readonly move: Move;
  /** kg/m³ */
  readonly keepAt: number;
  readonly controller: Controller;
  readonly feedforward: FeedforwardOf | null;
  /** What the scenario changes about the loop itself, and about the flow that it moves. */
  readonly changes: readonly Change[];
}

export interface Measure {
  /** `<stream>.<solute or species>` */
  readonly of: string;
  readonly analyser: Analyser;
  readonly range: readonly [low: number, high: number] | null;
  readonly seed: number;
}

export interface Move {
  readonly kind: 'ratio' | 'flow' | 'set point';
  /** Input that it sets: a flow, or the name of the loop whose set point it moves. */
  readonly quantity: string;
  /** For a ratio: the wild flow. */
  readonly over: string | null;
  /** Dimensionless, m³/s or kg/m³, by kind. */
  readonly low: number;
  readonly high: number;
  /** Of the flow that a ratio sets, m³/s: the least keeps its pump turning when the wild flow fails. */
  readonly flowLow: number;
  readonly flowHigh: number;
  /** Per s; Infinity: none stated. */
  readonly slewUp: number;
  readonly slewDown: number;
  /** s */
  readonly flowLag: number;
  readonly flowFilter: number;
}

export interface Controller {
  readonly action: 'direct' | 'reverse';
  /** Output per kg/m³. */
  readonly gain: number;
  /** s */
  readonly integralTime: number;
  readonly derivativeTime: number;
  readonly filter: number;
  readonly setPointWeight: number;
  /** s of the scan; null: on each result. */
  readonly scan: number | null;
  readonly auto: boolean;
}

export interface FeedforwardOf {
  readonly from: string;
  readonly analyser: Analyser;
  readonly seed: number;
  readonly gain: number;
  readonly lead: number;
  readonly lag: number;
  readonly form: 'add' | 'multiply';
}

const limit = later('a figure');
const slew = z.union([text(), object({ up: text(), down: text() })], {
  error: (i) => missing(i, "expected a rate such as '0.01 per min'"),
});
const time = figure(['a time'], notNegative);

/** `loops:` of a scenario. */
export const loopsSchema = record(
  object({
    measure: object({
      of: text().describe('a concentration in a stream'),
      analyser: analyserSchema,
      range: text().optional().describe("such as '0 to 2 g/L'"),
      seed: whole(0, 2_000_000_000).optional().describe('of its noise'),
    }),
    move: object({
      ratio: text().optional().describe('one flow / another'),
      flow: text().optional(),
      set_point: text().optional().describe('of another loop'),
      low: limit.optional(),
      high: limit.optional(),
      flow_low: limit.optional().describe('least flow that a ratio sets, without wild flow too'),
      flow_high: limit.optional().describe('most flow that a ratio sets'),
      slew: slew.optional(),
      flow_lag: time.optional(),
      flow_filter: time.optional().describe('of the measured flow that the ratio multiplies'),
    }),
    keep_at: later("a set point such as '0.75 g/L'"),
    controller: object({
      action: word(['direct', 'reverse']),
      gain: later("a gain such as '0.4 per g/L'"),
      integral_time: figure(['a time'], positive),
      derivative_time: time.optional(),
      filter: time.optional().describe('time constant on the measurement'),
      set_point_weight: number(between(-1e-9, 1 + 1e-9, '0 and 1')).optional(),
      runs: text().optional().describe("'on each result' or 'every 1 s'"),
      mode: word(['auto', 'manual']).optional(),
    }),
    feedforward: object({
      from: text().describe('a concentration in a stream'),
      analyser: analyserSchema,
      gain: later("a gain such as '0.3 per g/L'").optional(),
      lead: time.optional(),
      lag: time.optional(),
      form: word(['add', 'multiply']).optional(),
      seed: whole(0, 2_000_000_000).optional(),
    }).optional(),
  }),
  'loops by name',
).optional();
export type RawLoops = NonNullable<z.output<typeof loopsSchema>>;
export type RawLoop = RawLoops[string];
