import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Change, Scenario } from '../../../src/scenario/scenario.ts';
import { PERCENTS } from '../../../src/study/commission/approach.ts';
import { LOOKS, StepCourse } from '../../../src/study/commission/course.ts';
import { follow } from '../../../src/study/commission/follow.ts';
import { comesGood, onSpec } from '../../../src/study/commission/good.ts';
import type { Rest } from '../../../src/study/commission/rest.ts';
import { run } from '../../../src/study/run.ts';
import { anyPlant } from '../../plant/any-plant.ts';
import { cascade, unitsOfTransfer } from '../cascade.ts';

const how = { integrator: 'rodas5p', tolerance: 1e-6, repeatability: null, modes: 3 } as const;
const HOUR = 3600;

const plant = (more: Partial<Scenario> = {}): Scenario => ({
  ...cascade({
    stages: 4,
    aqueous: 0.02,
    organic: 0.02,
    feed: 4,
    solvent: 0.2,
    law: { law: 'ratio', ratio: 1.5 },
    transfer: unitsOfTransfer(5, 0.02, 0.02),
    parts: 2,
    // Roomy enough for a phase that stops.
    layers: { aqueous: 3, organic: 3 },
  }),
  horizon: HOUR,
  ...more,
});
const pulse = (at: number, by: number, lasts: number | null): Change => ({
  at,
  quantity: 'feed.s',
  how: { by, relative: true },
  over: 0,
  lasts,
  words: 'feed',
});

/** Largest share of a band by which a quantity is outside of it after the time that was told, seen on a fine grid. */
function worstAfter(s: Scenario): number {
  const f = follow(s, how);
  if (!f.settled) return 0;
  const { records, plant: p } = run({ ...s, horizon: f.ran, recordEvery: f.ran / 3000 }, how);
  let worst = 0;
  for (const q of comesGood(f)) {
    if (q.change === null || q.final === null) continue;
    const output = p.system.outputs.findIndex((o) => o.path === q.quantity.path);
    PERCENTS.forEach((percent, i) => {
      const half = (percent / 100) * (q.change as number);
      records.times.forEach((t, k) => {
        if (t <= (q.ofChange[i] as number)) return;
        worst = Math.max(worst, Math.abs(records.rows[k][output] - (q.final as number)) / half);
      });
    });
  }
  return worst;
}

describe('no reported time is earlier than a later excursion', () => {
  test('in random plants', () => {
    fc.assert(
      fc.property(anyPlant, (s) => {
        // What begins with the start belongs to it.
        const own = { ...s, upsets: s.upsets.map((u) => ({ ...u, at: 0 })), limits: [], horizon: 12 * HOUR };
        expect(worstAfter(own)).toBeLessThan(1 + 1e-3);
      }),
      { numRuns: 15, seed: 20 },
    );
  }, 120_000);

  test('where moves push the plant away again', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -0.6, max: 2, noNaN: true }),
        fc.double({ min: 0, max: 3 * HOUR, noNaN: true }),
        fc.double({ min: 60, max: HOUR, noNaN: true }),
        (by, at, lasts) => {
          expect(worstAfter(plant({ upsets: [pulse(at, by, lasts)] }))).toBeLessThan(1 + 1e-4);
        },
      ),
      { numRuns: 30, seed: 5 },
    );
  }, 60_000);

  test('an excursion that ends inside one step is seen', () => {
    // A parabola that leaves the band only between two looks.
    const peak = (s: number): number => 0.02 - 30 * (s - 0.5) ** 2;
    const values = Float64Array.from({ length: LOOKS }, (_, i) => peak(i / (LOOKS - 1)));
    expect(Math.max(...values)).toBeLessThan(0);
    const points = new StepCourse(values).points();
    expect(Math.max(...points.map((p) => p.v))).toBeCloseTo(0.02, 8);
    for (const p of points) expect(p.v).toBeCloseTo(peak(p.s), 10);
  });

  test('a turn beside either end of a step is seen', () => {
    for (const at of [0.05, 0.96]) {
      const curve = (s: number): number => -((s - at) ** 2);
      const values = Float64Array.from({ length: LOOKS }, (_, i) => curve(i / (LOOKS - 1)));
      const points = new StepCourse(values).points();
      expect(Math.max(...points.map((p) => p.v))).toBeCloseTo(0, 9);
      expect(points.map((p) => p.s)).toEqual([...points.map((p) => p.s)].sort((a, b) => a - b));
    }
  });
});

describe('final values', () => {
  test('are those of the inputs after the moves, whatever happened on the way', () => {
    const [plain, pulsed] = [plant(), plant({ upsets: [pulse(0, 1, 2 * HOUR)] })].map((s) =>
      comesGood(follow(s, how)),
    );
    plain.forEach((q, k) => {
      expect(Math.abs((pulsed[k].final as number) / (q.final as number) - 1)).toBeLessThan(1e-9);
    });
    // The rich feed is over before the plant can be at rest.
    expect(pulsed[0].ofChange[3]).toBeGreaterThan(2 * HOUR);
    expect(pulsed[0].overshoot?.share).toBeGreaterThan(0.5);
    const lasting = comesGood(follow(plant({ upsets: [pulse(0, 1, null)] }), how));
    // The law is a line through zero: twice the feed adds once more what the feed brings.
    expect(lasting[0].final).toBeGreaterThan(1.5 * (plain[0].final as number));
  });

  test('a start at rest has nothing to wait for', () => {
    const f = follow(plant({ start: 'steady' }), how);
    expect(f.settled).toBe(true);
    for (const q of comesGood(f)) {
      expect(q.change).toBeNull();
      expect(q.ofFinal).toEqual([0, 0, 0, 0]);
    }
  });
});

describe('no steady state', () => {
  const tank = (more: object): Scenario => {
    const s = plant();
    const own = {
      phase: 'organic',
      volume: 60,
      held: 20,
      content: [0],
      makeUp: null,
      passes: 0,
      removes: [],
    } as const;
    return {
      ...s,
      tanks: [{ name: 'tank', from: 'solvent', to: 'lean', flow: 0.015, ...own, ...more }],
      trains: s.trains.map((t) => ({ ...t, organic: { from: 'lean', to: 'extract' } })),
      horizon: 2 * HOUR,
    };
  };

  test('a tank that fills is told with the time at which it is full; the streams settle all the same', () => {
    const f = follow(tank({}), how);
    const { drifts } = f.rest as Rest;
    expect(drifts).toHaveLength(1);
    expect(drifts[0].rate).toBeCloseTo(0.005, 12);
    // 40 m³ of room at 0.005 m³/s.
    expect(drifts[0].until).toBeCloseTo(8000, 3);
    expect(f.settled).toBe(true);
  });

  test('a tank that runs dry, fills and runs dry again comes to no rest', () => {
    const f = follow(tank({ flow: 0.03 }), how);
    expect(f.settled).toBe(false);
    expect(f.events.length).toBeGreaterThan(4);
    for (const q of comesGood(f)) expect(q.ofChange.every((t) => t === null)).toBe(true);
  });
});

describe('on-spec', () => {
  const keep = (side: 'below' | 'above', value: number) =>
    ({ stream: 'raffinate', quantity: 's', side, value, from: 0 }) as const;
  // 4 stages: half of a mixer of a minute of both flows, and a layer of 3 m³ at 0.02 m³/s.
  const turnover = 4 * (60 + 150);

  test('is not before the first aqueous turnover, however clean the barren raffinate is', () => {
    const [o] = onSpec(follow(plant({ limits: [keep('below', 2)] }), how));
    expect(o.neverOutside).toBe(true);
    expect(o.from).toBeCloseTo(turnover, 6);
  });

  test('the turnover counts what was fed: without feed for half an hour it is that much later', () => {
    const dry: Change = {
      at: 0,
      quantity: 'feed.flow',
      how: { to: 0 },
      over: 0,
      lasts: HOUR / 2,
      words: 'no feed',
    };
    const [o] = onSpec(follow(plant({ upsets: [dry], limits: [keep('below', 2)] }), how));
    expect((o.from as number) - HOUR / 2).toBeCloseTo(turnover, 3);
  });

  test('is for good, and never where the plant comes to rest outside', () => {
    const found = onSpec(follow(plant({ limits: [keep('above', 0.2), keep('below', 0.2)] }), how));
    const final = found[0].final as number;
    expect(final).toBeGreaterThan(0.2);
    expect(found[0].from).toBeGreaterThanOrEqual(turnover - 1e-6);
    expect(found[1].from).toBeNull();
  });
});
