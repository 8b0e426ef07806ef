import { z } from 'zod';
import { commissioningKeys } from './commissioning-schema.ts';
import {
  arrow,
  between,
  either,
  figure,
  later,
  list,
  missing,
  name,
  notNegative,
  number,
  object,
  oneOf,
  phase,
  positive,
  record,
  text,
  whole,
  word,
} from './fields.ts';
import { followSchema } from './follow.ts';
import { FUNCTIONS } from './formula.ts';
import { loopsSchema } from './loops.ts';
import { isBuiltIn } from './names.ts';
import { dropSizeNames } from './plain.ts';
import { rehearsingKeys } from './rehearsing-schema.ts';
import {
  arrangement,
  blends,
  neutralises,
  organicShare,
  removes,
  splits,
  stageStreams,
} from './schema-circuit.ts';
import { show } from './show.ts';
import { MOST } from './units.ts';

/** Stages in one train; the pictures and the memory are sized for it. */
export const MOST_STAGES = 5000;
/** Exponents beyond this make a law a switch. */
const MOST_EXPONENT = 20;

const flow = figure(['a flow by volume', 'a flow by mass'], positive);
const volume = figure(['a volume'], positive);
const rate = figure(['a rate'], positive);
const duration = figure(['a time'], positive);
const density = figure(['a concentration'], positive);
const viscosity = figure(['a viscosity'], positive);
const diffusivity = figure(['a diffusivity'], positive);
const STARTS = ['barren', 'steady', 'empty'] as const;
const concentration = figure(
  ['a concentration', 'a molar concentration', 'a mass ratio', 'a mass fraction'],
  notNegative,
);
const exponent = number(between(0, MOST_EXPONENT));
const releases = record(number(notNegative), 'kg set free per kg extracted, by species');

const column = z.union(
  [
    list(
      z
        .number({ error: (i) => missing(i, 'expected a number') })
        .refine((v) => Math.abs(v) <= MOST, { error: (i) => `${show(i.input)} is too large for a plant` }),
      'a list of numbers',
    ),
    text(),
  ],
  { error: (i) => missing(i, 'expected a list of numbers, or the name of a column of the file') },
);

const LAWS = ['ratio', 'langmuir', 'freundlich', 'table', 'exchange', 'formula'];
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
      exponent,
    }),
    object({
      law: z.literal('table'),
      unit: text().optional().describe('unit of both columns when they are given here'),
      aqueous: column,
      organic: column,
      file: text().optional().describe('CSV file; aqueous and organic then name its columns'),
    }),
    object({
      law: z.literal('exchange'),
      constant: number(),
      extractant: figure(['a concentration'], positive).describe('total extractant, as solute it can carry'),
      per_solute: number().optional(),
      p: exponent.optional(),
      q: exponent.optional(),
      acid: text().optional().describe('the species that competes; the only one by default'),
      releases: releases.optional(),
    }),
    object({
      law: z.literal('formula'),
      organic: later('a formula such as 18*c_a/(1 + 0.9*c_a)').describe(
        `c_o as an expression of c_a, in g/L; functions: ${FUNCTIONS.join(', ')}`,
      ),
      constants: record(
        z.number({ error: (i) => missing(i, 'expected a plain number such as 0.9') }),
        'numbers by name',
      ).optional(),
      releases: releases.optional(),
    }),
  ],
  {
    error: (i) =>
      typeof i.input === 'object' && i.input !== null && !Array.isArray(i.input)
        ? oneOf({ input: (i.input as { law?: unknown }).law }, LAWS)
        : missing(i, 'expected a law such as {law: ratio, ratio: 2}'),
  },
);

const laws = record(law, 'a law for each solute that transfers').optional();

const length = figure(['a length'], positive);
const specificFlow = figure(['a specific flow'], positive);
const percentage = figure(['a percentage'], between(0, 1, '0 and 100 %'));
const share = figure(['a volume fraction'], notNegative);

const impeller = object({
  speed: rate.describe('rotations, such as 50 rpm'),
  diameter: length,
  vessel: length.optional().describe('diameter of the vessel; that of a cylinder as high as wide by default'),
  power_number: number().optional(),
  drops: word(dropSizeNames).optional().describe('drop-size correlation'),
});

const bandPoint = { thickness: length, at: specificFlow.describe('dispersed phase per settler area') };
const band = object({
  ...bandPoint,
  exponent: number(between(0, MOST_EXPONENT)).optional().describe('of the power law'),
  floods_at: specificFlow.optional().describe('flooding flux of the hyperbolic law'),
  hold_up: percentage.optional().describe('dispersed share in the band'),
  coalescer: number(between(0, 1.000001, '0 and 1'))
    .optional()
    .describe('factor of a coalescer on the thickness'),
  other_continuity: object(bandPoint).optional(),
});

const carryPoint = { organic_in_aqueous: share.optional(), aqueous_in_organic: share.optional() };
const entrainment = object({
  ...carryPoint,
  exponent: number(notNegative).optional().describe('growth with the throughput'),
  other_continuity: object(carryPoint).optional(),
});

const weirs = object({
  organic_length: length,
  aqueous_length: length,
  port: length.optional(),
  loss: figure(['a length'], notNegative).optional(),
});

const mixer = object({
  volume: volume.optional(),
  continuity: phase.optional().describe('the continuous phase; aqueous by default'),
  side: phase
    .optional()
    .describe('the side that the rate or the efficiency is stated for; aqueous by default'),
  ka: z
    .union([rate, object({ value: rate, fixed: either.optional() })], {
      error: (i) => missing(i, "expected a rate such as '0.15 1/s'"),
    })
    .optional(),
  stage_efficiency: figure(['a percentage'], between(0, 1, '0 and 100 %'))
    .optional()
    .describe('Murphree efficiency at the design flows'),
  impeller: impeller.optional(),
  pumps: either.optional().describe('the agitator also lifts what enters'),
  inversion: z
    .union([either, object({ below: percentage, above: percentage })], {
      error: (i) => missing(i, 'expected true, or {below: 25 %, above: 75 %} of organic'),
    })
    .optional(),
  overflow_weir: length.optional(),
  area: figure(['an area'], positive).optional(),
  organic_share: organicShare,
});

const settler = object({
  area: figure(['an area'], positive).optional(),
  aqueous_depth: figure(['a length'], positive).optional(),
  organic_depth: figure(['a length'], positive).optional(),
  aqueous_volume: volume.optional(),
  organic_volume: volume.optional(),
  tanks_in_series: whole(1, 50).optional(),
  short_circuit: percentage.optional(),
  band: band.optional(),
  entrainment: entrainment.optional(),
  weirs: weirs.optional(),
});

const stage = object({ mixer: mixer.optional(), settler: settler.optional(), ...stageStreams });
export type RawStage = z.output<typeof stage>;

const recycle = object({
  aqueous: flow.optional(),
  organic: flow.optional(),
  hold: number().optional().describe('organic to aqueous in the mixer'),
});

const upset = object({
  at: figure(['a time'], notNegative),
  change: text(),
  to: later("a value such as '8 g/L'").optional(),
  by: later("a change such as '+35 %'").optional(),
  follow: followSchema.optional(),
  over: figure(['a time'], notNegative).optional(),
  for: duration.optional(),
  put: text().optional().describe("'<loop> in manual', where a loop moves the quantity"),
});

const limit = object({
  keep: text().describe('a quantity, or a ratio of two: one / other'),
  below: later("a limit such as '0.6 g/L'").optional(),
  above: later("a limit such as '0.6 g/L'").optional(),
  from: figure(['a time'], notNegative).optional().describe('it counts from this time on'),
});

/** Names that a scenario uses as keys; the schema must know them beforehand. */
export interface Keys {
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  /** `stage 2` …, as the trains have them. */
  readonly stageKeys: readonly string[];
}

/** Scenario schema. */
export function scenarioSchema({ solutes, species, stageKeys }: Keys) {
  const dissolved = [...solutes, ...species].filter((n) => !isBuiltIn(n));
  const content = Object.fromEntries(dissolved.map((n) => [n, concentration.optional()]));
  const start = z.union([z.literal('as entering'), object(content)], {
    error: (i) => missing(i, "expected 'as entering' or concentrations by name"),
  });
  const differs = Object.fromEntries(stageKeys.map((k) => [k, stage.optional()]));
  return object({
    title: text(200),
    about: text(10_000, '\n\t').optional(),
    solutes: list(name, 'a list of names such as [copper]').min(1, {
      error: () => 'name at least one solute',
    }),
    species: list(name, 'a list of names such as [acid]').optional(),
    molar_masses: record(figure(['a molar mass'], positive), 'molar masses by name').optional(),
    densities: object({ aqueous: density.optional(), organic: density.optional() }).optional(),
    viscosities: object({ aqueous: viscosity.optional(), organic: viscosity.optional() }).optional(),
    interfacial_tension: figure(['a surface tension'], positive).optional(),
    diffusivities: record(
      object({ aqueous: diffusivity, organic: diffusivity }),
      'diffusivities by solute',
    ).optional(),
    // Settings after the content: a solute that is called like one is refused, and must not take its place here.
    feeds: record(
      object({
        ...content,
        phase,
        flow,
        neutralises: neutralises.describe('of each species, what a volume of this feed uses up'),
      }),
      'feeds by name',
    ).default({}),
    splits: splits.optional(),
    blends: blends.optional(),
    tanks: record(
      object({
        ...content,
        phase,
        from: name,
        to: name,
        volume,
        filled: figure(['a percentage', 'a volume'], positive).optional(),
        flow: flow.optional(),
        make_up: name.optional().describe('a feed that enters as well'),
        passes: figure(['a percentage'], notNegative)
          .optional()
          .describe('share of the other phase that is passed on'),
        removes,
        returns: record(releases, 'what a removed solute gives back, by solute').optional(),
      }),
      'tanks by name',
    ).optional(),
    trains: record(
      object({
        stages: whole(1, MOST_STAGES),
        aqueous: arrow,
        organic: arrow,
        mixer: mixer.optional(),
        settler: z
          .union([z.literal('none'), settler], {
            error: (i) => missing(i, "expected the settler's settings, or none"),
          })
          .optional(),
        ...arrangement,
        equilibrium: laws,
        initial: object({ aqueous: start.optional(), organic: start.optional() }).optional(),
        hydraulics: word(['full', 'weirs']).optional(),
        recycle: recycle.optional(),
        ...differs,
      }),
      'trains by name',
    ).default({}),
    batches: record(
      object({
        mixer,
        aqueous: object(content).optional(),
        organic: object(content).optional(),
        equilibrium: laws,
      }),
      'batches by name',
    ).optional(),
    start: z
      .union([word(STARTS), object({ saved: text() })], {
        error: (i) => oneOf(i, [...STARTS, '{saved: file}']),
      })
      .optional(),
    horizon: duration,
    record_every: duration.optional(),
    upsets: list(upset, 'a list of changes').optional(),
    limits: list(limit, 'a list of limits').optional(),
    ...commissioningKeys(upset, content, start),
    ...rehearsingKeys(upset),
    loops: loopsSchema,
  });
}

export type ScenarioSchema = ReturnType<typeof scenarioSchema>;
export type RawScenario = z.output<ScenarioSchema>;
