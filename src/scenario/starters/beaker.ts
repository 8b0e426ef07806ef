import { head, quoted, type Starter, span } from './starter.ts';

export const beaker: Starter = {
  name: 'beaker',
  what: 'a shake-out in the laboratory: the approach to equilibrium without flow',
  solutes: ['metal'],
  text: ({ title, solutes }) => {
    const a = quoted(solutes[0]);
    return `# Both phases stirred in one vessel without flow, as k·a is measured. Put your own figures in, each with its unit.
${head(title, solutes, 'A starter; all its figures are examples.')}

batches:                              # its phases are called 'beaker aqueous' and 'beaker organic'
  beaker:
    mixer: {volume: 1 L, organic_share: 50 %, ka: 0.02 1/s}
    aqueous: {${a}: 5 g/L}
    organic: {${a}: 0.1 g/L}
    equilibrium: {${a}: {law: ratio, ratio: 6}}

${span('6 min', '5 s')}

limits:
  - {keep: beaker aqueous.${solutes[0]}, below: 1 g/L, from: 3 min}
`;
  },
};
