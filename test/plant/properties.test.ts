import fc from 'fast-check';
import { expect, test } from 'vitest';
import { closure } from '../../src/plant/accounts.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import type { Event } from '../../src/solve/integrate.ts';
import type { F } from '../../src/solve/system.ts';
import { anyPlant } from './any-plant.ts';
import { follow } from './follow.ts';

const TOLERANCE = 1e-6;
/** Absolute tolerances by which a trial state may lie below its floor before the step is rejected. */
const BELOW = 10;

test('whatever the plant and its upsets: the run ends, balances close, nothing is negative or no number', () => {
  const happened = new Map<string, number>();
  const laws = new Set<string>();
  const note = (s: Scenario, events: readonly Event[]): void => {
    for (const what of ['empty', 'enough again', 'overflows', 'isotherm', 'inverts', 'floods'])
      happened.set(what, (happened.get(what) ?? 0) + events.filter((e) => e.message.includes(what)).length);
    for (const t of s.trains) for (const law of t.equilibrium) if (law) laws.add(law.law);
  };
  fc.assert(
    fc.property(anyPlant, (s) => {
      /** The deepest that any place went below its floor, in absolute tolerances, and where. */
      let lowest = { units: 0, place: '' };
      let finite = true;
      const { plant, run } = follow(s, TOLERANCE, (x, { system }) => {
        system.places.forEach(({ floor, scale, path }, i) => {
          finite &&= Number.isFinite(x[i]);
          if (floor === null) return;
          const units = (floor - x[i]) / (TOLERANCE * scale);
          if (units > lowest.units) lowest = { units, place: path };
        });
      });
      const end = run.state;
      expect(run.stop.reason).toBe('reached-end');
      expect(finite).toBe(true);
      expect(lowest.units, lowest.place).toBeLessThanOrEqual(BELOW * (1 + 1e-9));
      for (const a of plant.accounts)
        expect(closure(a, plant.barren, end).closure, a.name).toBeLessThanOrEqual(1e-9);
      for (const { name, weights } of plant.system.conserved) {
        const sum = (x: F): number => x.reduce((n, v, i) => n + weights[i] * v, 0);
        const size = end.reduce((n, v, i) => n + Math.abs(weights[i] * v), 0) + Math.abs(sum(plant.barren));
        expect(Math.abs(sum(end) - sum(plant.barren)), name).toBeLessThanOrEqual(1e-11 * size);
      }
      note(s, run.events);
    }),
    { seed: 1932, numRuns: 220, endOnFailure: true },
  );
  // Among them tanks ran empty, were refilled and overflowed, isotherms were left, mixers inverted, settlers flooded.
  for (const [what, count] of happened) expect(count, what).toBeGreaterThan(1);
  expect([...laws].sort()).toEqual(['exchange', 'formula', 'freundlich', 'langmuir', 'ratio', 'table']);
}, 240_000);
