import type { Plant } from '../../plant/assemble.ts';
import type { Phase } from '../../scenario/scenario.ts';

/** A concentration that a start-up is judged by. */
export interface Watched {
  /** Path of the output, and its place in the System. */
  readonly path: string;
  readonly output: number;
  readonly kind: 'outlet' | 'stream' | 'tank' | 'stage';
  /** The outlet, the stream, the tank, or `<train>.<stage>`. */
  readonly of: string;
  readonly component: string;
  readonly phase: Phase;
  /** The train that makes it; null for a tank. */
  readonly train: string | null;
}

/** All concentrations of outlets, of streams between trains and tanks, of tanks, batches and stages, in that order. */
export function watched(plant: Plant): Watched[] {
  const { scenario: s, network, system } = plant;
  const at = new Map(system.outputs.map((o, i) => [o.path, i]));
  const components = [...s.solutes, ...s.species];
  const take = (
    of: string,
    path: (c: string) => string,
    rest: Omit<Watched, 'path' | 'output' | 'of' | 'component'>,
  ): Watched[] =>
    components.flatMap((component) => {
      const output = at.get(path(component));
      return output === undefined ? [] : [{ path: path(component), output, of, component, ...rest }];
    });
  // A tank's own stream repeats the tank.
  const made = [...network.streams.values()].filter(
    (q) => q.maker.kind !== 'feed' && q.maker.kind !== 'tank',
  );
  const streams = made.map((q) => {
    const kind = network.outlets.some((o) => o.name === q.name) ? 'outlet' : 'stream';
    const train = q.maker.kind === 'train' ? (s.trains[q.maker.index]?.name ?? null) : null;
    return { kind, list: take(q.name, (c) => `${q.name}.${c}`, { kind, phase: q.phase, train }) } as const;
  });
  return [
    ...streams.filter((q) => q.kind === 'outlet').flatMap((q) => q.list),
    ...streams.filter((q) => q.kind === 'stream').flatMap((q) => q.list),
    ...s.tanks.flatMap((t) =>
      take(t.name, (c) => `${t.name}.${c}`, { kind: 'tank', phase: t.phase, train: null }),
    ),
    // A batch is a vessel without flow: each of its phases is one.
    ...s.batches.flatMap((b) =>
      (['aqueous', 'organic'] as const).flatMap((phase) =>
        take(`${b.name} ${phase}`, (c) => `${b.name} ${phase}.${c}`, { kind: 'tank', phase, train: null }),
      ),
    ),
    ...s.trains.flatMap((t) =>
      t.stages.flatMap((_, j) =>
        (['mixer', 'settler'] as const).flatMap((unit) =>
          (['aqueous', 'organic'] as const).flatMap((phase) =>
            take(`${t.name}.${j + 1}`, (c) => `${t.name}.${j + 1}.${unit}.${phase}.${c}`, {
              kind: 'stage',
              phase,
              train: t.name,
            }),
          ),
        ),
      ),
    ),
  ];
}
