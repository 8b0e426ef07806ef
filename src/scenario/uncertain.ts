import type { Law, Scenario, Stage, Transfer } from './scenario.ts';

/** The scenario with one of its inputs multiplied. */
export type Multiply = (s: Scenario, factor: number) => Scenario;

/** Every input of a plant that may be uncertain, by its path, with how it is multiplied. */
export function uncertainInputs(s: Scenario): ReadonlyMap<string, Multiply> {
  const found = new Map<string, Multiply>();
  const names = [...s.solutes, ...s.species];
  const content =
    (k: number) =>
    <T extends { readonly content: readonly number[] }>(q: T, by: number): T => ({
      ...q,
      content: q.content.map((c, i) => (i === k ? c * by : c)),
    });
  s.feeds.forEach((f, index) => {
    const edit =
      (change: (q: Scenario['feeds'][number], by: number) => Scenario['feeds'][number]): Multiply =>
      (t, by) => ({
        ...t,
        feeds: t.feeds.map((q, i) => (i === index ? change(q, by) : q)),
      });
    found.set(
      `${f.name}.flow`,
      edit((q, by) => ({ ...q, flow: q.flow * by })),
    );
    names.forEach((n, k) => {
      if (f.content[k] > 0) found.set(`${f.name}.${n}`, edit(content(k)));
    });
  });
  s.tanks.forEach((tank, index) => {
    const edit =
      (change: (q: Scenario['tanks'][number], by: number) => Scenario['tanks'][number]): Multiply =>
      (t, by) => ({
        ...t,
        tanks: t.tanks.map((q, i) => (i === index ? change(q, by) : q)),
      });
    if (tank.flow !== null)
      found.set(
        `${tank.name}.flow`,
        edit((q, by) => ({ ...q, flow: (q.flow as number) * by })),
      );
    // A tank holds no more than it can.
    found.set(
      `${tank.name}.filled`,
      edit((q, by) => ({ ...q, held: Math.min(q.volume, q.held * by) })),
    );
    names.forEach((n, k) => {
      if (tank.content[k] > 0) found.set(`${tank.name}.${n}`, edit(content(k)));
    });
  });
  s.trains.forEach((train, index) => {
    const edit =
      (change: (q: Scenario['trains'][number], by: number) => Scenario['trains'][number]): Multiply =>
      (t, by) => ({
        ...t,
        trains: t.trains.map((q, i) => (i === index ? change(q, by) : q)),
      });
    const stages = (change: (q: Stage, by: number) => Stage): Multiply =>
      edit((q, by) => ({ ...q, stages: q.stages.map((g) => change(g, by)) }));
    const transfer = (change: (q: Transfer, by: number) => Transfer): Multiply =>
      stages((q, by) => ({ ...q, mixer: { ...q.mixer, transfer: change(q.mixer.transfer, by) } }));
    const path = train.name;
    const given = new Set(train.stages.map((q) => q.mixer.transfer.given));
    if (given.has('ka') || given.has('efficiency')) found.set(`${path}.mixer.ka`, transfer(faster));
    if (given.has('impeller'))
      for (const key of ['speed', 'diameter'] as const)
        found.set(
          `${path}.mixer.${key}`,
          transfer((q, by) =>
            q.given === 'impeller' ? { ...q, impeller: { ...q.impeller, [key]: q.impeller[key] * by } } : q,
          ),
        );
    found.set(
      `${path}.mixer.volume`,
      stages((q, by) => ({ ...q, mixer: { ...q.mixer, volume: q.mixer.volume * by } })),
    );
    for (const phase of ['aqueous', 'organic'] as const)
      found.set(
        `${path}.settler.${phase}_volume`,
        stages((q, by) => ({ ...q, settler: { ...q.settler, [phase]: q.settler[phase] * by } })),
      );
    train.equilibrium.forEach((law, k) => {
      if (law === null) return;
      for (const [key, set] of lawNumbers(law))
        found.set(
          `${path}.equilibrium.${s.solutes[k]}.${key}`,
          edit((q, by) => ({
            ...q,
            equilibrium: q.equilibrium.map((l, i) => (i === k && l !== null ? set(l, by) : l)),
          })),
        );
    });
  });
  s.batches.forEach((batch, index) => {
    const edit =
      (change: (q: Scenario['batches'][number], by: number) => Scenario['batches'][number]): Multiply =>
      (t, by) => ({ ...t, batches: t.batches.map((q, i) => (i === index ? change(q, by) : q)) });
    if (batch.mixer.transfer.given !== 'impeller')
      found.set(
        `${batch.name}.mixer.ka`,
        edit((q, by) => ({ ...q, mixer: { ...q.mixer, transfer: faster(q.mixer.transfer, by) } })),
      );
  });
  return found;
}

/** K·a multiplied. Of a stage efficiency: E/(1 − E) is K·a·V/Q, so that is what is multiplied. */
function faster(q: Transfer, by: number): Transfer {
  if (q.given === 'ka') return { ...q, ka: q.ka * by };
  if (q.given !== 'efficiency') return q;
  const units = (by * q.efficiency) / (1 - q.efficiency);
  return { ...q, efficiency: units / (1 + units) };
}

/** Numbers of a law under the names that the scenario has for them. */
function lawNumbers(law: Law): [string, (l: Law, by: number) => Law][] {
  const number = (key: string): [string, (l: Law, by: number) => Law] => [
    key,
    (l, by) => ({ ...l, [key]: (l as unknown as Record<string, number>)[key] * by }) as Law,
  ];
  switch (law.law) {
    case 'ratio':
      return [number('ratio')];
    case 'langmuir':
      return [number('capacity'), number('affinity')];
    case 'freundlich':
      return [number('coefficient'), number('exponent')];
    case 'table':
      return [
        ['organic', (l, by) => (l.law === 'table' ? { ...l, organic: l.organic.map((v) => v * by) } : l)],
      ];
    case 'exchange':
      return [number('constant'), number('extractant'), number('p'), number('q')];
    case 'formula':
      return Object.keys(law.constants).map((name) => [
        name,
        (l, by) =>
          l.law === 'formula' ? { ...l, constants: { ...l.constants, [name]: l.constants[name] * by } } : l,
      ]);
  }
}
