import type { Network, Stream } from '../scenario/network.ts';
import type { Phase, Scenario, Train } from '../scenario/scenario.ts';

/**
 * What a train's vessels hold at the barren start, kg/m³ by component: the aqueous as what enters the train but
 * without solutes, the organic as the organic that enters it; or as the scenario says.
 */
export function entering(
  s: Scenario,
  net: Network,
  t: Train,
): { aqueous: readonly number[]; organic: readonly number[] } {
  const { aqueous, organic } = t.initial;
  const liquor = (): readonly number[] => upstream(s, net, t.aqueous.from, 'aqueous');
  return {
    aqueous:
      aqueous === 'as entering'
        ? liquor()
        : aqueous === 'barren'
          ? liquor().map((c, k) => (k < s.solutes.length ? 0 : c))
          : aqueous,
    organic: organic === 'as entering' ? upstream(s, net, t.organic.from, 'organic') : organic,
  };
}

/** Composition at time zero of the feed or tank from which a stream comes, through however many trains. */
export function upstream(
  s: Scenario,
  net: Network,
  name: string,
  phase: Phase,
  seen: readonly string[] = [],
): readonly number[] {
  const { maker } = net.streams.get(name) as Stream;
  if (maker.kind === 'feed') return s.feeds[maker.index].content;
  if (maker.kind === 'tank') return s.tanks[maker.index].content;
  const from = s.trains[maker.index][phase].from;
  // A loop without a tank has been refused before, so this ends.
  return seen.includes(from) ? [] : upstream(s, net, from, phase, [...seen, from]);
}
