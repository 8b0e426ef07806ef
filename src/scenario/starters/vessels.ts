import { head, quoted, type Starter, span } from './starter.ts';

export const vessels: Starter = {
  name: 'vessels',
  what: 'one train with agitators, dispersion bands and weirs, filled from empty',
  solutes: ['metal'],
  text: ({ title, solutes }) => {
    const a = quoted(solutes[0]);
    return `# Vessels as they are: transfer from the agitator, a dispersion band in each settler, real levels over weirs. The
# plant is filled from empty. Put your own figures in, each with its unit.
${head(title, solutes, 'A starter; all its figures are examples.')}

densities: {aqueous: 1020 kg/m^3, organic: 815 kg/m^3}
viscosities: {aqueous: 1.1 mPa s, organic: 2.2 mPa s}
interfacial_tension: 25 mN/m
diffusivities:
  ${a}: {aqueous: 7e-10 m^2/s, organic: 2e-10 m^2/s}

feeds:
  feed:    {phase: aqueous, flow: 200 m^3/h, ${a}: 5 g/L}
  solvent: {phase: organic, flow: 220 m^3/h, ${a}: 0.1 g/L}

trains:
  extraction:
    stages: 2
    aqueous: feed -> raffinate
    organic: solvent -> extract
    hydraulics: weirs
    mixer:
      volume: 21 m^3
      continuity: organic             # the organic surrounds drops of aqueous
      impeller: {speed: 60 rpm, diameter: 1.5 m}
      overflow_weir: 2.5 m            # its length
    settler:
      area: 90 m^2
      aqueous_depth: 0.35 m           # at the flows of time zero
      organic_depth: 0.30 m
      tanks_in_series: 3              # well-mixed parts of each layer
      band: {thickness: 6 cm, at: 2.2 m/h, exponent: 3}      # measured at one flow of drops per area
      entrainment: {organic_in_aqueous: 30 ppm, aqueous_in_organic: 200 ppm}
      weirs: {organic_length: 6 m, aqueous_length: 6 m}
    equilibrium:
      ${a}: {law: langmuir, capacity: 9 g/L, affinity: 1.5 L/g}

start: empty                          # nothing but a heel; barren would be vessels full of barren phases
${span('12 h', '5 min')}

upsets:
  - {at: 6 h, change: extraction.2.mixer.speed, by: -40 %, for: 2 h}       # a slow agitator
  - {at: 9 h, change: extraction.1.settler.aqueous_weir, by: +2 cm, over: 5 min, for: 1 h}

limits:
  - {keep: raffinate.${solutes[0]}, below: 0.6 g/L, from: 3 h}
`;
  },
};
