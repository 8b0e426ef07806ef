import { describe, expect, it } from 'vitest';
import { commission } from '../../../src/study/commission/commission.ts';
import { run, usual } from '../../../src/study/run.ts';
import { steady } from '../../../src/study/steady.ts';
import { fromText } from '../../support/plants.ts';

const text = (more = '', move = '', start = 'barren'): string => `title: Start-up with a loop
solutes: [copper]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 0.2 g/L}
trains:
  extraction:
    stages: 2
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: langmuir, capacity: 9 g/L, affinity: 1.5 L/g}}
loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min, noise: 3 % of reading, dropout: 5 %}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 1.6${move}}
    keep_at: 0.5 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min}
start: ${start}
horizon: 10 h
record_every: 1 min
limits: [{keep: raffinate.copper, below: 0.62 g/L}]
${more}`;
const plant = (...pieces: Parameters<typeof text>) => fromText(text(...pieces));
const find = (r: ReturnType<typeof commission>, path: string) =>
  r.quantities.find((q) => q.quantity.path === path) as (typeof r.quantities)[number];

describe('a start-up with a loop in automatic', () => {
  const s = plant();
  const r = commission(s, usual);

  it('comes to rest where the steady state with its loop is', () => {
    const rested = steady(s);
    const y = (path: string): number =>
      rested.outputs[rested.plant.system.outputs.findIndex((o) => o.path === path)];
    for (const path of ['raffinate.copper', 'loaded.copper'])
      expect(find(r, path).final).toBeCloseTo(y(path), 8);
    expect(find(r, 'raffinate.copper').final).toBeCloseTo(0.5, 8);
    expect('state' in r.followed.rest && r.followed.rest.loops[0].output).toBeCloseTo(
      rested.loops[0].output,
      8,
    );
  });

  it('comes good when the records of a plain run without noise say so', () => {
    const quiet = fromText(text().replace(', noise: 3 % of reading, dropout: 5 %', ''));
    const { records, plant: p } = run({ ...quiet, horizon: r.followed.ran }, usual);
    for (const path of ['raffinate.copper', 'loaded.copper']) {
      const i = p.system.outputs.findIndex((o) => o.path === path);
      const q = find(r, path);
      const last = records.rows.findLastIndex(
        (row) => Math.abs(row[i] - (q.final as number)) > 0.01 * (q.change as number),
      );
      expect(q.ofChange[3] as number).toBeGreaterThanOrEqual(records.times[last] - 1);
      expect(q.ofChange[3] as number).toBeLessThanOrEqual(records.times[last + 1] + 1);
    }
  });

  it('rests at the limit that binds, where the set point cannot be reached', () => {
    const q = commission(plant('', ', flow_high: 200 m^3/h'), usual);
    expect('state' in q.followed.rest && q.followed.rest.loops[0].binds).toBe('high');
    expect(find(q, 'raffinate.copper').final).toBeGreaterThan(0.6);
    expect(q.followed.settled).toBe(true);
  });

  it('follows procedures that put it in manual, to the same rest where they give it back', () => {
    const q = commission(
      plant(`procedures:
  by ratio first: {moves: [{change: AIC-1.mode, to: manual, for: 3 h}]}
  by hand: {moves: [{change: lean.flow, to: 500 m^3/h, put: AIC-1 in manual}]}
`),
      usual,
    );
    const named = (name: string) => q.starts.find((p) => p.name === name);
    expect(named('by ratio first')?.settled).toBe(true);
    expect(named('by ratio first')?.endsElsewhere).toEqual([]);
    // By hand for good the plant rests where it does without a loop and with that flow from the start.
    const flow = 'upsets: [{at: 0 h, change: lean.flow, to: 500 m^3/h}]\n';
    const bare = commission(fromText(text(flow).replace(/loops:[\s\S]*?start:/, 'start:')), usual);
    const end = named('by hand')?.endsElsewhere.find((e) => e.path === 'raffinate.copper');
    expect(end?.final).toBeCloseTo(find(bare, 'raffinate.copper').final as number, 8);
  });

  it('from the steady state with its loop has nothing to wait for', () => {
    const q = commission(plant('', '', 'steady'), usual);
    expect(q.steady).toBe(0);
  });
});
