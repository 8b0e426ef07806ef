import { z } from 'zod';
import { FUNCTIONS } from './formula.ts';
import { hint } from './nearest.ts';
import { examples, type Kind, type Quantity, quantity, show } from './units.ts';

/** Stages in one train; the pictures and the memory are sized for it. */
export const MOST_STAGES = 5000;

/** A figure with its unit, read into what is used inside. `check` may refuse a value in its own words. */
function figure(kinds: readonly Kind[], check?: (q: Quantity) => string | null) {
  return z
    .union([z.string(), z.number()], { error: (i) => missing(i, kinds[0]) })
    .transform((text, context): Quantity => {
      const q = quantity(text, ...kinds);
      const wrong = 'wrong' in q ? q.wrong : check?.(q);
      if (!wrong && !('wrong' in q)) return q;
      context.addIssue({ code: 'custom', message: typeof wrong === 'string' ? wrong : '' });
      return z.NEVER;
    })
    .describe(`${kinds[0]}, such as ${examples[kinds[0]]}`);
}

const missing = (issue: { input?: unknown }, kind: Kind): string =>
  issue.input === undefined
    ? `is missing; expected ${kind} such as '${examples[kind]}'`
    : `expected ${kind} such as '${examples[kind]}', got ${show(issue.input)}`;

const positive = (q: Quantity): string | null => (q.value > 0 ? null : 'must be greater than 0');
const notNegative = (q: Quantity): string | null => (q.value >= 0 ? null : 'must not be negative');
const below1 = (q: Quantity): string | null =>
  q.value > 0 && q.value < 1 ? null : `must lie between 0 and 100 %, got ${q.value * 100} %`;

const flow = figure(['a flow by volume', 'a flow by mass'], positive);
const volume = figure(['a volume'], positive);
const time = figure(['a time']);
const number = (check = positive) => figure(['a plain number'], check);
const concentration = figure(
  ['a concentration', 'a molar concentration', 'a mass ratio', 'a mass fraction'],
  notNegative,
);
const text = z.string({
  error: (i) =>
    i.input === undefined ? 'is missing; expected a text' : `expected a text, got ${show(i.input)}`,
});
const phase = z.enum(['aqueous', 'organic'], { error: (i) => oneOf(i, ['aqueous', 'organic']) });
const arrow = z
  .string({
    error: (i) =>
      i.input === undefined
        ? "is missing; expected 'stream in -> stream out'"
        : `expected 'stream in -> stream out', got ${show(i.input)}`,
  })
  .transform((t, context) => {
    const parts = t.split('->').map((p) => p.trim());
    if (parts.length === 2 && parts.every((p) => p !== '')) return { from: parts[0], to: parts[1] };
    context.addIssue({ code: 'custom', message: `expected 'stream in -> stream out', got ${show(t)}` });
    return z.NEVER;
  })
  .describe("two streams: 'what enters -> what leaves'");

function oneOf(issue: { input?: unknown }, words: readonly string[]): string {
  if (issue.input === undefined) return `is missing; expected one of ${words.join(', ')}`;
  const near = typeof issue.input === 'string' ? hint(issue.input, words) : '';
  return `expected one of ${words.join(', ')}, got ${show(issue.input)}${near.startsWith('; did') ? near : ''}`;
}

const whole = (least: number, most: number) => {
  const error = (i: { input?: unknown }): string =>
    `expected a whole number from ${least} to ${most}, got ${i.input === undefined ? 'nothing' : show(i.input)}`;
  return z.int({ error }).min(least, { error }).max(most, { error });
};

const record = <T extends z.ZodType>(value: T, what: string) =>
  z.record(z.string(), value, {
    error: (i) =>
      i.input === undefined || i.input === null
        ? `is missing; expected ${what}`
        : `expected ${what}, got ${show(i.input)}`,
  });

const object = <T extends z.ZodRawShape>(shape: T) =>
  z.strictObject(shape, {
    error: (i) => (i.code === 'invalid_type' ? `expected settings by name, got ${show(i.input)}` : undefined),
  });

const law = z.discriminatedUnion(
  'law',
  [
    object({ law: z.literal('ratio'), ratio: number().describe('distribution ratio D, organic to aqueous') }),
    object({
      law: z.literal('langmuir'),
      capacity: figure(['a concentration', 'a molar concentration'], positive),
      affinity: figure(['an affinity'], positive),
    }),
    object({
      law: z.literal('freundlich'),
      coefficient: number().describe('K of c_o = K·c_a^n, concentrations in g/L'),
      exponent: number(),
    }),
    object({
      law: z.literal('table'),
      unit: z.string().optional().describe('unit of both columns when they are given here'),
      aqueous: z.union([z.array(z.number()), z.string()]),
      organic: z.union([z.array(z.number()), z.string()]),
      file: z.string().optional().describe('CSV file; aqueous and organic then name its columns'),
    }),
    object({
      law: z.literal('exchange'),
      constant: number(),
      extractant: figure(['a concentration'], positive).describe('total extractant, as solute it can carry'),
      per_solute: number().optional(),
      p: number().optional(),
      q: number().optional(),
      acid: z.string().optional().describe('the species that competes; the only one by default'),
      releases: z.record(z.string(), number(notNegative)).optional(),
    }),
    object({
      law: z.literal('formula'),
      organic: z
        .union([z.string(), z.number()])
        .describe(`c_o as an expression of c_a, in g/L; functions: ${FUNCTIONS.join(', ')}`),
      constants: z.record(z.string(), z.number()).optional(),
      releases: z.record(z.string(), number(notNegative)).optional(),
    }),
  ],
  {
    error: (i) =>
      typeof i.input === 'object' && i.input !== null
        ? oneOf({ input: (i.input as { law?: unknown }).law }, LAWS)
        : `expected a law such as {law: ratio, ratio: 2}, got ${show(i.input)}`,
  },
);
const LAWS = ['ratio', 'langmuir', 'freundlich', 'table', 'exchange', 'formula'];

const mixer = object({
  volume: volume.optional(),
  continuity: phase.optional().describe('the continuous phase; aqueous by default'),
  side: phase
    .optional()
    .describe('the side that the rate or the efficiency is stated for; aqueous by default'),
  ka: z
    .union(
      [
        figure(['a rate'], positive),
        object({ value: figure(['a rate'], positive), fixed: z.boolean().optional() }),
      ],
      {
        error: (i) => `expected a rate such as '0.15 1/s', got ${show(i.input)}`,
      },
    )
    .optional(),
  stage_efficiency: figure(['a percentage'], below1)
    .optional()
    .describe('Murphree efficiency at the design flows'),
});

const settler = object({
  area: figure(['an area'], positive).optional(),
  aqueous_depth: figure(['a length'], positive).optional(),
  organic_depth: figure(['a length'], positive).optional(),
  aqueous_volume: volume.optional(),
  organic_volume: volume.optional(),
  tanks_in_series: whole(1, 50).optional(),
});

/** Scenario schema. Names of solutes, species and stages are keys, so they must be known beforehand. */
export function scenarioSchema(
  solutes: readonly string[],
  species: readonly string[],
  stageKeys: readonly string[],
) {
  const content = Object.fromEntries([...solutes, ...species].map((n) => [n, concentration.optional()]));
  const start = z.union([z.literal('as entering'), object(content)], {
    error: (i) => `expected 'as entering' or concentrations by name, got ${show(i.input)}`,
  });
  const differs = Object.fromEntries(
    stageKeys.map((k) => [k, object({ mixer: mixer.optional(), settler: settler.optional() }).optional()]),
  );
  return object({
    title: text,
    about: text.optional(),
    solutes: z
      .array(text, { error: () => 'expected a list of names such as [copper]' })
      .min(1, { error: () => 'name at least one solute' }),
    species: z.array(text, { error: () => 'expected a list of names such as [acid]' }).optional(),
    molar_masses: record(figure(['a molar mass'], positive), 'molar masses by name').optional(),
    densities: object({
      aqueous: figure(['a concentration'], positive).optional(),
      organic: figure(['a concentration'], positive).optional(),
    }).optional(),
    feeds: record(object({ phase, flow, ...content }), 'feeds by name'),
    tanks: record(
      object({
        phase,
        from: text,
        to: text,
        volume,
        filled: figure(['a percentage', 'a volume'], positive).optional(),
        flow: flow.optional(),
        ...content,
      }),
      'tanks by name',
    ).optional(),
    trains: record(
      object({
        stages: whole(1, MOST_STAGES),
        aqueous: arrow,
        organic: arrow,
        mixer: mixer.optional(),
        settler: settler.optional(),
        equilibrium: record(law, 'a law for each solute that transfers').optional(),
        initial: object({ aqueous: start.optional(), organic: start.optional() }).optional(),
        ...differs,
      }),
      'trains by name',
    ),
    start: z.enum(['barren', 'steady'], { error: (i) => oneOf(i, ['barren', 'steady']) }).optional(),
    horizon: time.refine((q) => q.value > 0, { error: () => 'must be greater than 0' }),
    record_every: time.refine((q) => q.value > 0, { error: () => 'must be greater than 0' }).optional(),
    upsets: z
      .array(
        object({
          at: time,
          change: text,
          to: z.union([z.string(), z.number()]).optional(),
          by: z.union([z.string(), z.number()]).optional(),
          follow: object({ file: text, column: text, time: text.optional() }).optional(),
          over: figure(['a time'], notNegative).optional(),
          for: figure(['a time'], positive).optional(),
        }),
        { error: (i) => `expected a list of changes, got ${show(i.input)}` },
      )
      .optional(),
    limits: z
      .array(
        object({
          keep: text,
          below: z.union([z.string(), z.number()]).optional(),
          above: z.union([z.string(), z.number()]).optional(),
        }),
        { error: (i) => `expected a list of limits, got ${show(i.input)}` },
      )
      .optional(),
  });
}

export type RawScenario = z.output<ReturnType<typeof scenarioSchema>>;
