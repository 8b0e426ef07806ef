import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { controlled } from '../../src/study/control/joined.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText } from '../support/plants.ts';

const plant = (move: string, upset: string, keepAt = '0.4 g/L'): Scenario =>
  fromText(`title: Limits of a loop
solutes: [copper]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 0.2 g/L}
trains:
  extraction:
    stages: 3
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: langmuir, capacity: 9 g/L, affinity: 1.5 L/g}}
start: steady
horizon: 12 h
record_every: 1 min
loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 2${move}}
    keep_at: ${keepAt}
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min}
upsets: [${upset}]
`);

const column = (r: RunResult, path: string): number[] => {
  const i = r.plant.system.outputs.findIndex((o) => o.path === path);
  return r.records.rows.map((row) => row[i] * (path.endsWith('.flow') ? 3600 : 1));
};
const richer = '{at: 1 h, change: liquor.copper, by: +40 %, for: 4 h}';

describe('limits of the flow that a ratio sets', () => {
  it('hold the flow while the ratio would have more; nothing winds up meanwhile', () => {
    const free = run(plant('', richer));
    const held = run(plant(', flow_high: 330 m^3/h', richer));
    expect(Math.max(...column(free, 'lean.flow'))).toBeGreaterThan(340);
    expect(Math.max(...column(held, 'lean.flow'))).toBeCloseTo(330, 6);
    // The output stays where the flow is at its limit, so it leaves with the first result below the set point.
    expect(Math.max(...column(held, 'AIC-1.output'))).toBeCloseTo(330 / 420, 6);
    const over = column(held, 'AIC-1.measurement').findLastIndex((v) => v > 0.4);
    const turned = column(held, 'AIC-1.output').findIndex(
      (u, k) => k > 60 && u < 330 / 420 - 1e-6 && k > over - 5,
    );
    expect(turned - over).toBeLessThanOrEqual(11);
    expect(held.loops[0].atLimit).toBeGreaterThan(1800);
  });

  it('follow the wild flow: with more feed the same flow is a lower ratio', () => {
    const r = run(plant(', flow_high: 330 m^3/h', '{at: 1 h, change: liquor.flow, by: +40 %}'));
    const flow = column(r, 'lean.flow');
    expect(flow[flow.length - 1]).toBeCloseTo(330, 6);
    const ratio = column(r, 'AIC-1.output');
    expect(ratio[ratio.length - 1]).toBeCloseTo(330 / (1.4 * 420), 6);
  });

  it('keep a least flow when the feed fails, where a ratio alone stops with it', () => {
    const fails = '{at: 1 h, change: liquor.flow, to: 0 m^3/h, over: 5 min, for: 1 h}';
    const alone = column(run(plant('', fails)), 'lean.flow');
    expect(Math.min(...alone)).toBeCloseTo(0, 6);
    const kept = run(plant(', flow_low: 150 m^3/h, flow_lag: 20 s', fails));
    const flow = column(kept, 'lean.flow');
    expect(Math.min(...flow)).toBeGreaterThan(149.99);
    expect(flow[100]).toBeCloseTo(150, 2);
    expect(kept.events.map((e) => e.message)).toContain('lean.flow is held at flow_low of AIC-1');
    expect(Math.max(...kept.closures.map((c) => c.closure))).toBeLessThan(1e-9);
  });

  it('keep a loop from a set point that it could reach otherwise, and the steady state says so', () => {
    const [l] = steady(plant(', flow_high: 200 m^3/h', richer)).loops;
    expect(l.binds).toBe('high');
    expect(l.output).toBeCloseTo(200 / 420, 9);
    expect(steady(plant('', richer)).loops[0].binds).toBeNull();
  });

  it('have exact derivatives: none by what is held', () => {
    const { plant: p, loops } = controlled(plant(', flow_high: 100 m^3/h', richer));
    const { system, parameters } = p;
    const b = new Float64Array(system.B.column.length);
    system.byInput(p.barren, p.inputs, parameters, b);
    const own = loops[0].spec.inputs.output;
    b.forEach((v, k) => {
      if (system.B.column[k] === own) expect(v).toBe(0);
    });
  });
});

describe('limits of an output that somebody changes', () => {
  it('hold it from then on, at once where it is beyond them, and let it go again', () => {
    const r = run(plant('', `${richer}, {at: 2 h, change: AIC-1.high, to: 0.7, for: 2 h}`));
    const u = column(r, 'AIC-1.output');
    expect(u[119]).toBeGreaterThan(0.7);
    for (let k = 121; k < 240; k++) expect(u[k]).toBeLessThanOrEqual(0.7 + 1e-12);
    expect(Math.max(...u.slice(245))).toBeGreaterThan(0.7);
  });

  it('by a ramp of the slew where there is one', () => {
    const r = run(plant(', slew: 0.01 per min', `${richer}, {at: 2 h, change: AIC-1.high, to: 0.5}`));
    const u = column(r, 'AIC-1.output');
    expect(u[121] - u[120]).toBeCloseTo(-0.01, 6);
    expect(u[u.length - 1]).toBeLessThanOrEqual(0.5 + 1e-9);
  });
});
