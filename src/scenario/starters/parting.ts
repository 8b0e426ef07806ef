import { head, quoted, type Starter, span } from './starter.ts';

export const parting: Starter = {
  name: 'parting',
  what: 'two solutes parted: extraction, scrub with its liquor returned, strip',
  solutes: ['product', 'impurity'],
  text: ({ title, solutes }) => {
    const [a, b] = solutes.map(quoted);
    return `# Two solutes compete for one extractant: the first is the product, the second is scrubbed off the loaded organic,
# and the scrub liquor with what it took along goes back to the extraction. Put your own figures in, each with its unit.
${head(title, solutes, 'A starter; all its figures are examples.')}
species: [acid]                       # stays in the aqueous, takes part in the chemistry

feeds:
  liquor:     {phase: aqueous, flow: 50 m^3/h, ${a}: 3 g/L, ${b}: 5 g/L, acid: 2 g/L}
  scrub acid: {phase: aqueous, flow: 5 m^3/h, acid: 25 g/L}
  strip acid: {phase: aqueous, flow: 10 m^3/h, acid: 180 g/L}

blends:
  extraction feed: [liquor, spent scrub]    # the reflux of the scrub

tanks:
  organic tank: {phase: organic, from: stripped organic, to: lean organic, volume: 35 m^3, filled: 75 %, flow: 30 m^3/h}

trains:
  extraction:
    stages: 4
    aqueous: extraction feed -> raffinate
    organic: lean organic -> loaded organic
    mixer:   {volume: 4.5 m^3, continuity: organic, stage_efficiency: 92 %}
    settler: {area: 20 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: &laws                # D = constant·(free extractant)^p/acid^q, p and q 2 unless stated
      ${a}: {law: exchange, constant: 16, extractant: 11 g/L, releases: {acid: 1.5}}
      ${b}: {law: exchange, constant: 0.25, extractant: 11 g/L, releases: {acid: 1.7}}
  scrub:
    stages: 2
    aqueous: scrub acid -> spent scrub
    organic: loaded organic -> scrubbed organic
    mixer:   {volume: 3 m^3, continuity: organic, stage_efficiency: 92 %}
    settler: {area: 16 m^2, aqueous_depth: 0.25 m, organic_depth: 0.30 m}
    recycle: {hold: 2}                # aqueous goes back to the mixer to hold this organic-to-aqueous ratio
    equilibrium: *laws
  strip:
    stages: 2
    aqueous: strip acid -> rich liquor
    organic: scrubbed organic -> stripped organic
    mixer:   {volume: 3 m^3, continuity: organic, stage_efficiency: 92 %}
    settler: {area: 16 m^2, aqueous_depth: 0.25 m, organic_depth: 0.30 m}
    initial: {aqueous: as entering}
    equilibrium: *laws

start: barren
${span('36 h', '10 min')}

upsets:
  - {at: 20 h, change: scrub acid.flow, by: -50 %, over: 10 min, for: 4 h}

limits:
  - {keep: rich liquor.purity of ${solutes[0]}, above: 98 %, from: 16 h}    # start-up is over by then
  - {keep: raffinate.${solutes[0]}, below: 0.15 g/L, from: 16 h}
`;
  },
};
