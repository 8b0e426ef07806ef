import type { Analyser } from '../../scenario/analyser.ts';
import type { Scenario } from '../../scenario/scenario.ts';

/**
 * The scenario with analysers of loops that read without noise and never fail. What comes good for good cannot be told of
 * a plant that its own noise keeps moving; bias, delay and interval stay.
 */
export function withoutNoise(s: Scenario): Scenario {
  if (!s.loops) return s;
  const quiet = <T extends { readonly analyser: Analyser }>(q: T): T => ({
    ...q,
    analyser: { ...q.analyser, noise: { absolute: 0 }, dropout: 0 },
  });
  const loops = s.loops.map((l) => ({
    ...l,
    measure: quiet(l.measure),
    feedforward: l.feedforward && quiet(l.feedforward),
  }));
  return { ...s, loops };
}
