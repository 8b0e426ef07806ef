// A sweep: what the organic flow and the number of extraction stages do to the raffinate, at rest and in the upset.
// In a clone: node scenarios/sweep.mjs. In a project of your own: npm install the package, and name a file of yours.
import { fileURLToPath } from 'node:url';
import { findSteady, readScenarioFile, simulate } from 'upsettle';

const base = readScenarioFile(fileURLToPath(new URL('saltbush-copper.yaml', import.meta.url)));

for (const stages of [2, 3])
  for (const flow of [390, 430, 470]) {
    const plant = base.with({
      'trains.extraction.stages': stages,
      'tanks.organic tank.flow': `${flow} m^3/h`,
      horizon: '27 h',
      'upsets.1': undefined, // the repair of a mixer, which comes later
    });
    const rest = findSteady(plant).value('raffinate.copper'); // kg/m^3, which is g/L
    const [{ worst, outside }] = simulate(plant, { tolerance: 1e-5 }).limits;
    const hours = `${(outside / 3600).toFixed(2)} h above the limit`;
    console.log(
      `${stages} stages, ${flow} m^3/h: ${rest.toFixed(3)} g/L, ${worst.value.toFixed(3)} at worst, ${hours}`,
    );
  }
