import type { Problem } from './refusal.ts';
import type { Path, Phase, Scenario, Train } from './scenario.ts';

/** What some settings need of others: properties for an agitator, weirs for every stage, vessels that can be empty. */
export function checkNeeds(s: Scenario, problems: Problem[]): void {
  for (const t of s.trains) {
    const path = ['trains', t.name];
    if (t.stages.some((q) => q.mixer.transfer.given === 'impeller')) agitatorNeeds(s, t, path, problems);
    if (t.hydraulics === 'weirs') weirNeeds(s, t, path, problems);
    bypassNeeds(s, t, path, problems);
    cellNeeds(s, t, path, problems);
    upsetNeeds(s, t, problems);
  }
  if (s.start === 'empty')
    for (const t of s.trains)
      if (t.hydraulics !== 'weirs')
        problems.push({
          path: ['start'],
          message: `an empty start needs hydraulics: weirs in every train; '${t.name}' has full vessels`,
        });
}

const PHASES: readonly Phase[] = ['aqueous', 'organic'];

function agitatorNeeds(s: Scenario, t: Train, path: Path, problems: Problem[]): void {
  const { density, viscosity, tension, diffusivity } = s.properties;
  const missing = [
    ...PHASES.flatMap((p) => (density[p] === null ? [`densities.${p}`] : [])),
    ...PHASES.flatMap((p) => (viscosity[p] === null ? [`viscosities.${p}`] : [])),
    ...(tension === null ? ['interfacial_tension'] : []),
    ...s.solutes.flatMap((n, i) =>
      t.equilibrium[i] && diffusivity[i] === null ? [`diffusivities.${n}`] : [],
    ),
  ];
  if (missing.length > 0)
    problems.push({
      path: [...path, 'mixer', 'impeller'],
      message: `transfer from an impeller needs ${missing.join(', ')}`,
    });
}

function weirNeeds(s: Scenario, t: Train, path: Path, problems: Problem[]): void {
  const { density } = s.properties;
  for (const p of PHASES)
    if (density[p] === null)
      problems.push({
        path: [...path, 'hydraulics'],
        message: `weirs need densities.${p}, such as '1000 kg/m^3'`,
      });
  if (density.aqueous !== null && density.organic !== null && density.organic >= density.aqueous)
    problems.push({
      path: ['densities', 'organic'],
      message: 'the organic must be lighter than the aqueous; look at both densities',
    });
  const without = t.stages.findIndex((q) => q.settler.weirs === null);
  if (without >= 0)
    problems.push({
      path: [...path, 'settler'],
      message: `hydraulics: weirs needs the weirs of every settler, such as 'weirs: {organic_length: 8 m, aqueous_length: 8 m}'; stage ${without + 1} has none`,
    });
}

/** Without settlers a stage keeps its hold-ups: nothing can be sent back from a settler, and no phase be led past. */
function cellNeeds(s: Scenario, t: Train, path: Path, problems: Problem[]): void {
  const cells = t.stages.some((q) => q.settler.parts === 0);
  const refuse = (field: string, what: string): number =>
    problems.push({
      path: [...path, field],
      message: `${what} needs settlers; this train has settler: none; take it out or state a settler`,
    });
  if (!cells) {
    const given = t.stages.findIndex((q) => q.mixer.organicShare !== null);
    if (given >= 0)
      problems.push({
        path: [...path, 'mixer', 'organic_share'],
        message:
          'the share of a mixer with a settler follows from the flows; it can be stated with settler: none',
      });
    return;
  }
  if (t.recycle !== null) refuse('recycle', 'recycle');
  if (t.stages.some((q) => q.mixer.inversion !== null)) refuse('mixer', 'inversion');
  if (s.upsets.some((u) => u.quantity.startsWith(`${t.name}.`) && u.quantity.endsWith(' bypass')))
    refuse('settler', 'a bypass');
}

/** What an upset changes must be there. */
function upsetNeeds(s: Scenario, t: Train, problems: Problem[]): void {
  t.stages.forEach((q, j) => {
    const stage = `${t.name}.${j + 1}`;
    const changes = (quantity: string): boolean => s.upsets.some((u) => u.quantity === quantity);
    if (q.mixer.transfer.given !== 'impeller' && changes(`${stage}.mixer.speed`))
      problems.push({
        path: ['upsets'],
        message: `'${stage}.mixer.speed' can only change where the mixer has an impeller; state one`,
      });
    if (t.hydraulics !== 'weirs' && changes(`${stage}.settler.aqueous_weir`))
      problems.push({
        path: ['upsets'],
        message: `'${stage}.settler.aqueous_weir' can only change with hydraulics: weirs; state that for its train`,
      });
  });
}

/** Full stages keep their volumes by a balance that a bypassed stage with carry-over would not close. */
function bypassNeeds(s: Scenario, t: Train, path: Path, problems: Problem[]): void {
  const bypassed = s.upsets.some(
    (u) => u.quantity.startsWith(`${t.name}.`) && u.quantity.endsWith(' bypass'),
  );
  const carries = t.stages.some((q) => q.settler.carry !== null || q.settler.band !== null);
  if (bypassed && carries && t.hydraulics === 'full')
    problems.push({
      path: [...path, 'hydraulics'],
      message: 'a stage that is bypassed while phases are carried over needs hydraulics: weirs',
    });
}
