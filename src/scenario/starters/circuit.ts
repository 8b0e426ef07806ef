import { head, quoted, type Starter, type StarterNames, span } from './starter.ts';

/** Feeds and the tank of a closed circuit. */
const around = (a: string): string => `feeds:                                # what enters from outside
  liquor:     {phase: aqueous, flow: 300 m^3/h, ${a}: 4 g/L, acid: 2 g/L}
  strip feed: {phase: aqueous, flow: 100 m^3/h, ${a}: 35 g/L, acid: 180 g/L}

tanks:                                # the pump of this tank sets the flow of the whole organic loop
  organic tank: {phase: organic, from: stripped organic, to: lean organic, volume: 200 m^3, filled: 70 %, flow: 300 m^3/h}`;

const trains = (a: string): string => `trains:
  extraction:
    stages: 2                         # stage 1 is where the aqueous enters
    aqueous: liquor -> raffinate      # what enters -> what leaves; an outlet is a stream that nobody takes
    organic: lean organic -> loaded organic
    mixer:   {volume: 30 m^3, continuity: organic, stage_efficiency: 93 %}
    settler: {area: 130 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m, tanks_in_series: 3}
    # A cation exchanger: D = constant·(free extractant)^p/acid^q; the extractant as the ${a} that it can carry,
    # and the acid that each gram of ${a} sets free.
    equilibrium: &law
      ${a}: {law: exchange, constant: 16, extractant: 9 g/L, p: 2, q: 2, releases: {acid: 1.54}}
  strip:
    stages: 2
    aqueous: strip feed -> rich liquor
    organic: loaded organic -> stripped organic
    mixer:   {volume: 20 m^3, continuity: organic, stage_efficiency: 93 %}
    settler: {area: 100 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m, tanks_in_series: 3}
    equilibrium: *law                 # the same law, by its name above
    initial: {aqueous: as entering}   # filled with its liquor`;

const plant = ({ title, solutes }: StarterNames): string => `${head(
  title,
  solutes,
  'A starter; all its figures are examples.',
)}
species: [acid]                       # stays in the aqueous, takes part in the chemistry

${around(quoted(solutes[0]))}

${trains(quoted(solutes[0]))}`;

const SOLUTES = ['metal'] as const;

export const circuit: Starter = {
  name: 'circuit',
  what: 'extraction and strip, the organic going round through a tank',
  solutes: SOLUTES,
  text: (
    names,
  ) => `# A closed circuit: the organic takes up in the extraction, gives in the strip and comes back by way of a tank.
# Put your own figures in, each with its unit.
${plant(names)}

start: barren                         # vessels full, the aqueous still without ${names.solutes[0]}
${span('30 h', '5 min')}

upsets:                               # what nobody asked for
  - {at: 14 h, change: liquor.${names.solutes[0]}, by: +30 %, over: 30 min, for: 4 h}
  - {at: 24 h, change: extraction.1.mixer, to: stopped, for: 20 min}

limits:                               # what an outlet must keep to
  - {keep: raffinate.${names.solutes[0]}, below: 0.5 g/L}
`,
};

export const loop: Starter = {
  name: 'loop',
  what: 'that circuit with a control loop on the ratio of organic to liquor',
  solutes: SOLUTES,
  text: (
    names,
  ) => `# A closed circuit with a loop that holds the raffinate: 'check' says whether it drives the plant the right way
# round, 'tune' finds settings for it. Put your own figures in, each with its unit.
${plant(names)}

loops:
  AIC-1:
    measure: {of: raffinate.${names.solutes[0]}, analyser: {every: 10 min, delay: 5 min, noise: 2 % of reading}}
    move: {ratio: organic tank.flow / liquor.flow, low: 0.7, high: 1.4, slew: 0.01 per min}
    keep_at: 0.3 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 60 min}   # direct: more ratio when it measures more

start: steady                         # at rest, the loop at its set point
${span('24 h', '5 min')}

upsets:
  - {at: 2 h, change: liquor.${names.solutes[0]}, by: +15 %, over: 30 min, for: 8 h}

limits:
  - {keep: raffinate.${names.solutes[0]}, below: 0.5 g/L}
`,
};
