import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../../src/scenario/scenario.ts';
import { mapColumns, startSizeMap } from '../../../src/study/rehearse/map.ts';
import { rehearse } from '../../../src/study/rehearse/rehearse.ts';
import { run } from '../../../src/study/run.ts';
import { tanksInSeries } from './tanks-in-series.ts';

const HOUR = 3600;

describe('a plant with an island of kept starts', () => {
  // Two dips two hours apart; either of them can cover the rise of an hour, so there are two stretches of starts.
  const s = tanksInSeries(
    1,
    `horizon: 12 h
upsets: [{at: 5 h, change: brine.salt, by: +3 g/L, for: 1 h}]
limits: [{keep: outlet.salt, below: 6 g/L}]
answers:
  two dips:
    start: 150 min before upset
    moves:
      - {change: brine.salt, by: -3 g/L, for: 70 min}
      - {at: 2 h, change: brine.salt, by: -3 g/L, for: 70 min}
`,
  );

  it('lists both, and plain runs agree inside and beside them', () => {
    const [a] = rehearse(s).answers;
    const starts = a.bounds?.starts ?? [];
    expect(starts).toHaveLength(2);
    expect(a.latest).toBe(starts[0].to);
    const kept = (start: number): boolean =>
      run({
        ...s,
        start: 'steady',
        upsets: [...s.upsets, ...a.answer.steps[0].moves.map((m) => ({ ...m, at: start + m.at }))],
      }).limits[0].spells.length === 0;
    for (const { from, to, fromBracket, toBracket } of starts) {
      expect(kept((from + to) / 2)).toBe(true);
      if (fromBracket) expect([kept(fromBracket[0] - 1), kept(from + 1)]).toEqual([false, true]);
      if (toBracket) expect([kept(to - 1), kept(toBracket[1] + 1)]).toEqual([true, false]);
    }
    // Between the two neither dip covers the rise.
    expect(kept((starts[0].to + starts[1].from) / 2)).toBe(false);
  });
});

describe('what binds', () => {
  const s = (answers: string): Scenario =>
    tanksInSeries(
      2,
      `horizon: 8 h
upsets: [{at: 1 h, change: brine.salt, by: +3 g/L, for: 2 h}]
limits: [{keep: outlet.salt, below: 6 g/L}]
answers: ${answers}
`,
    );
  const binds = (answer: string) => rehearse(s(`{one: ${answer}}`)).answers[0];

  it('is lateness where the limit is kept', () => {
    const a = binds('{start: after upset, moves: [{change: brine.salt, by: -2.5 g/L}]}');
    expect(a.binds).toBe('lateness');
    expect(a.bounds?.starts).toHaveLength(1);
  });

  it('is lateness where it comes too late as written', () => {
    const a = binds('{start: 90 min after upset, moves: [{change: brine.salt, by: -2.5 g/L}]}');
    expect(a.binds).toBe('too late');
    expect(a.figures.kept).toBe(false);
    expect(a.latest).not.toBeNull();
    expect(a.worstAtOnce).toBeNull();
  });

  it('is size where no start helps, and a larger one would', () => {
    const a = binds('{start: after upset, moves: [{change: brine.salt, by: -1 g/L}]}');
    expect(a.binds).toBe('size');
    expect(a.latest).toBeNull();
    // At once it leaves 5 + 3 − 1 g/L at the end of the rise, less what two tanks have not yet seen of it.
    expect(a.worstAtOnce?.[0]).toBeCloseTo(7, 2);
    // Two tanks let through 1 − e^(−x)(1 + x), x = 12 by then, of 3 − 1·f.
    const through = 1 - Math.exp(-12) * 13;
    const [least, most] = a.bounds?.sizes?.[0].fromBracket ?? [0, 0];
    expect(least).toBeLessThanOrEqual((3 * through - 1) / through + 1e-3);
    expect(most).toBeGreaterThanOrEqual((3 * through - 1) / through - 1e-3);
  });

  it('is neither where nothing helps, and nothing where nothing is needed', () => {
    expect(binds('{start: after upset, moves: [{change: diluent.flow, by: +10 %}]}').binds).toBe('neither');
    const calm = rehearse(
      tanksInSeries(
        2,
        `horizon: 8 h
upsets: [{at: 1 h, change: brine.salt, by: +0.5 g/L, for: 2 h}]
limits: [{keep: outlet.salt, below: 6 g/L}]
answers: {one: {start: after upset, moves: [{change: brine.salt, by: -1 g/L}]}}
`,
      ),
    );
    expect(calm.nothing.kept).toBe(true);
    expect(calm.answers[0].bounds).toBeNull();
    expect(calm.unaided.sizes?.[0].to).toBeCloseTo(2, 2);
  });

  it('an answer may be taken back when the rise has passed, and not much before', () => {
    const a = binds('{start: after upset, moves: [{change: brine.salt, by: -2.5 g/L}]}');
    const end = a.bounds?.ends?.at(-1);
    expect(end?.to).toBe(8 * HOUR);
    // The rise ends at 3 h; from 5.5 g/L the outlet needs a while to reach 6 with 8 g/L in the feed.
    expect(end?.from).toBeGreaterThan(2.5 * HOUR);
    expect(end?.from).toBeLessThan(3 * HOUR);
  });
});

describe('conditions and sequences', () => {
  const s = tanksInSeries(
    1,
    `horizon: 10 h
upsets: [{at: 1 h, change: brine.salt, by: +3 g/L}]
limits: [{keep: outlet.salt, below: 9 g/L}]
analysers:
  AT-1: {of: outlet.salt, every: 10 min, delay: 6 min}
answers:
  on warning: {when: 'AT-1 above 6 g/L, then after 5 min', moves: [{change: brine.salt, by: -1 g/L}]}
  by itself: {when: 'outlet.salt above 6 g/L', moves: [{change: brine.salt, by: -1 g/L}]}
  later: {when: 'AT-1 below 7.5 g/L', moves: [{change: brine.salt, by: -1 g/L}]}
  never: {when: 'AT-1 above 20 g/L', moves: [{change: brine.salt, by: -1 g/L}]}
  both: {sequence: [on warning, later], between: 20 min}
`,
  );
  const { answers } = rehearse(s);
  const starts = (name: string) => answers.find((a) => a.answer.name === name)?.plan.starts;
  // One tank: y = 5 + 3·(1 − e^(−t/600)) passes 6 at t = 600·ln(3/2).
  const passes = HOUR + 600 * Math.log(1.5);

  it('a condition on the quantity itself is met when it passes the value', () => {
    expect(starts('by itself')?.[0]).toBeCloseTo(passes, -1);
  });

  it('one on an analyser when the first result beyond it appears, then the time after it', () => {
    const sample = Math.ceil(passes / 600) * 600;
    expect(starts('on warning')).toEqual([sample + 360 + 300]);
  });

  it('one that is never met is never begun', () => {
    expect(starts('never')).toEqual([null]);
    expect(answers.find((a) => a.answer.name === 'never')?.binds).toBe('never begun');
  });

  it('the operator comes to the second when the first is made, and its condition is that of the run with the first', () => {
    const [first, second] = starts('both') ?? [];
    expect(first).toBe(starts('on warning')?.[0]);
    // With the first step the outlet tends to 7 g/L; it never comes above 7.5, so the first result after 20 min will do.
    expect(second).toBe(Math.ceil(((first ?? 0) + 1200 - 360) / 600) * 600 + 360);
  });
});

describe('the map', () => {
  const s = tanksInSeries(
    2,
    `horizon: 8 h
upsets: [{at: 1 h, change: brine.salt, by: +3 g/L, for: 2 h}]
limits: [{keep: outlet.salt, below: 6 g/L}]
answers: {dip: {start: 10 min after upset, moves: [{change: brine.salt, by: -2.5 g/L}]}}
`,
  );

  it.each(['worst', 'time'] as const)('holds what plain runs give: %s', async (of) => {
    const r = rehearse(s);
    const map = await startSizeMap(r, 'dip', { columns: 5, rows: 4, of }, async (batches, done) => {
      for (const [i, b] of batches.entries()) done(i, mapColumns(b));
    });
    expect(map.values).toHaveLength(4);
    const [move] = r.answers[0].answer.steps[0].moves;
    map.sizes.forEach((size, k) => {
      map.starts.forEach((start, i) => {
        const how = 'by' in move.how ? { ...move.how, by: move.how.by * size } : move.how;
        const plain = run({ ...s, start: 'steady', upsets: [...s.upsets, { ...move, at: start, how }] })
          .limits[0];
        const known = of === 'worst' ? plain.worst.value : plain.outside;
        expect(Math.abs(map.values[k][i] - known)).toBeLessThan(of === 'worst' ? 2e-3 : 20);
      });
    });
  });
});

describe('limits and upsets', () => {
  const s = (upsets: string, limit: string): Scenario =>
    tanksInSeries(1, `horizon: 10 h\nupsets: [${upsets}]\nlimits: [{keep: outlet.salt, ${limit}}]\n`);

  it('a limit that is over already has no time of break', () => {
    const [l] = rehearse(s('{at: 1 h, change: brine.salt, by: +3 g/L}', 'below: 4.9 g/L')).nothing.limits;
    expect(l).toMatchObject({ overBefore: true, breaks: null, stillOver: true, kept: false });
    expect(l.outside).toBeCloseTo(9 * HOUR, 3);
  });

  it('a break belongs to the upset that began last before it', () => {
    const two = '{at: 1 h, change: brine.salt, by: +0.5 g/L}, {at: 4 h, change: brine.salt, by: +1 g/L}';
    const [l] = rehearse(s(two, 'below: 6 g/L')).nothing.limits;
    // 5.5 + (1 − e^(−t/600)) passes 6 at 600·ln 2.
    expect(l.breaks?.upset).toBe(2);
    expect(l.breaks?.after).toBeCloseTo(600 * Math.LN2, 1);
    expect(l.stillOver).toBe(true);
    // Inputs end elsewhere: recovery is to the new steady state of 6.5 g/L, 2 % of the largest departure of 1.5 from it.
    expect(l.goesElsewhere).toBe(true);
    expect((l.recovered ?? 0) - 4 * HOUR).toBeCloseTo(600 * Math.log(1 / 0.03), -1);
  });

  it('a lower limit is broken downwards', () => {
    const r = rehearse(s('{at: 1 h, change: brine.salt, by: -3 g/L, for: 1 h}', 'above: 4 g/L'));
    const [l] = r.nothing.limits;
    expect((l.breaks?.time ?? 0) - HOUR).toBeCloseTo(600 * Math.log(1.5), 1);
    expect(l.worst.value).toBeCloseTo(5 - 3 * (1 - Math.exp(-6)), 4);
    expect(l.beyond).toBeNull();
    expect(r.unaided.sizes?.[0].to).toBeCloseTo(1 / (3 * (1 - Math.exp(-6))), 2);
  });

  it('an answer that would begin after the end changes nothing', () => {
    const late = tanksInSeries(
      1,
      `horizon: 4 h
upsets: [{at: 1 h, change: brine.salt, by: +3 g/L}]
limits: [{keep: outlet.salt, below: 6 g/L}]
answers: {late: {start: 20 h after upset, moves: [{change: brine.salt, by: -3 g/L}]}}
`,
    );
    const r = rehearse(late);
    expect(r.answers[0].figures.outside).toBeCloseTo(r.nothing.outside, 6);
    expect(r.answers[0].binds).toBe('too late');
    expect(r.answers[0].bounds?.ends).toBeNull();
  });
});
