import { head, quoted, type Starter, span } from './starter.ts';

export const single: Starter = {
  name: 'single',
  what: 'one train, its solvent fresh and once through',
  solutes: ['acid'],
  text: ({ title, solutes }) => {
    const a = quoted(solutes[0]);
    return `# One counter-current train with a constant distribution ratio. Put your own figures in, each with its unit.
${head(title, solutes, 'A starter; all its figures are examples.')}

feeds:                                # what enters from outside; an outlet is a stream that nobody takes
  feed:    {phase: aqueous, flow: 20 m^3/h, ${a}: 30 g/L}
  solvent: {phase: organic, flow: 30 m^3/h, ${a}: 0.2 g/L}

trains:
  extraction:
    stages: 5                         # stage 1 is where the aqueous enters
    aqueous: feed -> raffinate        # what enters -> what leaves
    organic: solvent -> extract
    mixer:   {volume: 2 m^3, continuity: organic, stage_efficiency: 90 %}
    settler: {area: 12 m^2, aqueous_depth: 0.4 m, organic_depth: 0.4 m}
    equilibrium:                      # c_o = D·c_a; other laws: langmuir, freundlich, table, exchange, formula
      ${a}: {law: ratio, ratio: 1.4}

start: barren                         # vessels full, the aqueous still without ${solutes[0]}
${span('24 h', '10 min')}

upsets:                               # what nobody asked for; take the list out to see the start-up alone
  - {at: 12 h, change: feed.${solutes[0]}, by: +30 %, over: 30 min, for: 4 h}

limits:                               # what an outlet must keep to
  - {keep: raffinate.${solutes[0]}, below: 1.5 g/L}
`;
  },
};
