import { describe, expect, test } from 'vitest';
import type { Change, Scenario } from '../../src/scenario/scenario.ts';
import { run, runInTurns, usual } from '../../src/study/run.ts';
import { scenario } from '../support/plants.ts';
import { cascade, reader, unitsOfTransfer } from './cascade.ts';

const plant = (more: Partial<Scenario> = {}): Scenario => ({
  ...cascade({
    stages: 3,
    aqueous: 0.02,
    organic: 0.02,
    feed: 4,
    solvent: 0.2,
    law: { law: 'ratio', ratio: 1.5 },
    transfer: unitsOfTransfer(5, 0.02, 0.02),
  }),
  horizon: 1000,
  recordEvery: 300,
  ...more,
});
const change = (at: number): Change => ({
  at,
  quantity: 'feed.s',
  how: { to: 6 },
  over: 0,
  lasts: null,
  words: 'richer',
});

describe('records', () => {
  test('are taken from zero in steps, and at the horizon', () => {
    expect(run(plant()).records.times).toEqual([0, 300, 600, 900, 1000]);
    expect(run(plant({ horizon: 900 })).records.times).toEqual([0, 300, 600, 900]);
    expect(run(plant({ recordEvery: 5000 })).records.times).toEqual([0, 1000]);
  });

  test('show the barren start: aqueous without solute, organic as it enters', () => {
    const { records, plant: p } = run(plant());
    const read = reader(p);
    const [first] = records.rows;
    expect(read(first, 'raffinate.s')).toBe(0);
    expect(read(first, 'extract.s')).toBeCloseTo(0.2, 12);
    expect(read(first, 'feed.s')).toBe(4);
  });

  test('at a corner show the feed just after it', () => {
    const { records, plant: p } = run(plant({ upsets: [change(600)] }));
    const read = reader(p);
    expect(records.rows.map((row) => read(row, 'feed.s'))).toEqual([4, 4, 6, 6, 6]);
  });
});

describe('snapshots', () => {
  const limits = [{ stream: 'raffinate', quantity: 's', side: 'below', value: 0.05, from: 0 } as const];

  test('are the start, the moment before the first upset, the worst and the end, in the order of time', () => {
    const pulse: Change = { ...change(400), lasts: 150 };
    const { snapshots, limits: reports } = run(
      plant({ upsets: [pulse], limits, start: 'steady', horizon: 4000 }),
    );
    expect(snapshots.map((s) => s.label)).toEqual(['start', 'before the upset', 'worst', 'end']);
    expect(snapshots[1].time).toBe(400);
    expect(snapshots[2].time).toBe(reports[0].worst.time);
    expect(snapshots[2].outputs).toEqual(reports[0].atWorst);
    expect(snapshots[3].time).toBe(4000);
  });

  test('before the upset the feed is what it was', () => {
    const { snapshots, plant: p } = run(plant({ upsets: [change(600)] }));
    expect(reader(p)(snapshots[1].outputs, 'feed.s')).toBe(4);
  });
});

describe('a run in turns', () => {
  const never = { due: () => true, interrupted: () => false };

  test('gives the same figures as one in one go', async () => {
    const s = scenario('saltbush-copper');
    const whole = run(s, usual);
    const turns = await runInTurns(s, usual, never);
    expect(turns.records).toEqual(whole.records);
    expect(turns.limits).toEqual(whole.limits);
    expect(turns.closures).toEqual(whole.closures);
  });

  test('that is interrupted keeps what was computed and says that it is not complete', async () => {
    const s = scenario('saltbush-copper');
    let turn = 0;
    const result = await runInTurns(s, usual, { due: () => true, interrupted: () => ++turn > 30 });
    expect(result.stop.reason).toBe('interrupted');
    expect(result.complete).toBe(false);
    const { times, rows } = result.records;
    expect(times[times.length - 1]).toBe(result.stop.time);
    expect(rows.length).toBe(times.length);
    expect(result.stop.time).toBeLessThan(s.horizon);
    for (const c of result.closures) expect(c.closure).toBeLessThan(1e-11);
    // As far as it got it is the run that it would have been.
    const whole = run(s, usual);
    rows.slice(0, -1).forEach((row, i) => {
      expect(row).toEqual(whole.records.rows[i]);
    });
  });

  test('progress goes up to the whole', () => {
    const seen: number[] = [];
    run(plant(), { ...usual, progress: (share) => seen.push(share) });
    expect(seen[seen.length - 1]).toBe(1);
    expect([...seen].sort((a, b) => a - b)).toEqual(seen);
  });
});
