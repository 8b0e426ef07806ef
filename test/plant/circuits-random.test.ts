import fc from 'fast-check';
import { expect, test } from 'vitest';
import { closure } from '../../src/plant/accounts.ts';
import { anyCircuit } from './any-circuit.ts';
import { follow } from './follow.ts';

const TOLERANCE = 1e-6;

test('however streams divide and stages are arranged: the run ends, balances close, all is finite', () => {
  const seen = new Set<string>();
  fc.assert(
    fc.property(anyCircuit, (s) => {
      let finite = true;
      const { plant, run } = follow(s, TOLERANCE, (x) => {
        finite &&= x.every(Number.isFinite);
      });
      expect(run.stop.reason).toBe('reached-end');
      expect(finite).toBe(true);
      for (const a of plant.accounts)
        expect(closure(a, plant.barren, run.state).closure, a.name).toBeLessThanOrEqual(1e-9);
      for (const t of s.trains) {
        seen.add(t.arrangement.kind);
        if (t.stages[0].settler.parts === 0) seen.add('cells');
        if (t.backFlow.aqueous > 0) seen.add('back-flow');
        for (const q of t.stages) {
          for (const d of q.draws) seen.add(`draw by ${'share' in d.take ? 'share' : 'flow'}`);
          if (q.takes.length > 0) seen.add('side feed');
        }
      }
      if (s.splits.length > 0) seen.add('split');
      if (s.blends.length > 0) seen.add('blend');
      if (s.tanks.some((t) => t.removes.some((r) => r !== null))) seen.add('removal');
      if (run.events.some((e) => e.message.includes('used up'))) seen.add('acid used up');
    }),
    { seed: 1932, numRuns: 120, endOnFailure: true },
  );
  expect([...seen].sort()).toEqual(
    [
      ...[
        'counter-current',
        'co-current',
        'cross-current',
        'cells',
        'back-flow',
        'draw by share',
        'draw by flow',
      ],
      ...['side feed', 'split', 'blend', 'removal', 'acid used up'],
    ].sort(),
  );
});
