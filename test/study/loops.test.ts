import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { controlled } from '../../src/study/control/joined.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText, scenario } from '../support/plants.ts';

const plant = (loops: string, rest = ''): Scenario =>
  fromText(`title: Loops
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
record_every: 10 min
${loops}${rest}`);

const loop = (more = '', controller = '', move = ''): string => `loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 2, flow_lag: 20 s${move}}
    keep_at: 0.4 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min${controller}}
${more}`;
const up = (what: string): string => `upsets:\n  - {${what}}\n`;

/** A column of the records by path. */
const column = (r: RunResult, path: string): number[] => {
  const i = r.plant.system.outputs.findIndex((o) => o.path === path);
  expect(i, path).toBeGreaterThanOrEqual(0);
  return r.records.rows.map((row) => row[i]);
};
const last = (list: readonly number[]): number => list[list.length - 1];

describe('a loop in manual', () => {
  const still = up('at: 2 h, change: liquor.copper, by: +20 %, over: 30 min, for: 3 h');
  it('is no loop at all, to the last bit', () => {
    const bare = run(plant('', still));
    const manual = run(plant(loop('', ', mode: manual'), still));
    for (const o of bare.plant.system.outputs) expect(column(manual, o.path)).toEqual(column(bare, o.path));
    expect(manual.work).toEqual(bare.work);
    // The analyser goes on measuring.
    expect(manual.loops[0].results.length).toBe(71);
    expect(last(column(manual, 'AIC-1.measurement'))).toBeGreaterThan(0);
  });

  it('follows the wild flow at its ratio', () => {
    const r = run(plant(loop('', ', mode: manual'), up('at: 2 h, change: liquor.flow, by: +20 %')));
    expect(last(column(r, 'lean.flow'))).toBeCloseTo((1.2 * 430) / 3600, 9);
    const ratio = column(r, 'AIC-1.output');
    for (const u of ratio) expect(u).toBe(ratio[0]);
    expect(ratio[0]).toBeCloseTo(430 / 420, 12);
  });

  it('takes an output by hand', () => {
    const r = run(plant(loop('', ', mode: manual'), up('at: 2 h, change: AIC-1.output, to: 1.3')));
    expect(last(column(r, 'lean.flow'))).toBeCloseTo((1.3 * 420) / 3600, 9);
  });
});

describe('a loop in automatic', () => {
  it('rests where it is told to, with the output the unknown', () => {
    const r = steady(plant(loop()));
    const y = r.outputs[r.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper')];
    expect(y).toBeCloseTo(0.4, 9);
    expect(r.loops[0].binds).toBeNull();
    // The same output given by hand leads there, step by step in time.
    const by = up(`at: 1 min, change: AIC-1.output, to: ${r.loops[0].output}`);
    const there = run({ ...plant(loop('', ', mode: manual'), by), horizon: 60 * 3600 });
    expect(last(column(there, 'raffinate.copper'))).toBeCloseTo(0.4, 6);
  });

  it('from there does not move while nothing happens', () => {
    const r = run(plant(loop()));
    const u = column(r, 'AIC-1.output');
    expect(Math.max(...u) - Math.min(...u)).toBeLessThan(1e-7);
  });

  it('says which limit binds where the set point cannot be reached, and stays there', () => {
    const text = loop().replace('high: 2', 'high: 0.6');
    const r = steady(plant(text));
    expect(r.loops[0]).toMatchObject({ binds: 'high', output: 0.6 });
    expect(r.loops[0].measurement).toBeGreaterThan(0.4);
    const u = column(run(plant(text)), 'AIC-1.output');
    for (const v of u) expect(v).toBe(0.6);
  });

  it('keeps the books through an upset: u = Kc·e + (Kc/Ti)·Σ h·e', () => {
    const r = run(plant(loop(), up('at: 61 min, change: liquor.copper, by: +10 %')));
    const { results } = r.loops[0];
    let sum = 0;
    let before = 0;
    for (const q of results) {
      sum += (q.time - before) * ((q.value as number) - 0.4);
      before = q.time;
    }
    const u = column(r, 'AIC-1.output');
    const e = (last(results.map((q) => q.value as number)) as number) - 0.4;
    expect(last(u) - u[0]).toBeCloseTo(0.3 * e + (0.3 / 2400) * sum, 8);
    expect(last(u) - u[0]).toBeGreaterThan(0.02);
  });

  it('brings the outlet back', () => {
    const r = run(plant(loop(), up('at: 61 min, change: liquor.copper, by: +10 %')));
    expect(Math.abs(last(column(r, 'raffinate.copper')) - 0.4)).toBeLessThan(0.01);
  });

  it('costs at most four steps a move in the demonstration plant, upset and noise included', () => {
    const r = run(scenario('saltbush-loop'));
    expect(r.work.steps / r.loops[0].moves).toBeLessThan(4);
  });

  it('does not know how often it is recorded', () => {
    const upset = up('at: 61 min, change: liquor.copper, by: +10 %');
    const often = { ...plant(loop(), upset), recordEvery: 60 };
    const a = run(plant(loop(), upset)).loops[0];
    const b = run(often).loops[0];
    expect(b).toEqual(a);
  });

  it('follows set points that are moved, by a ramp', () => {
    const r = run(plant(loop(), up('at: 1 h, change: AIC-1.set point, to: 0.5 g/L, over: 2 h')));
    const sp = column(r, 'AIC-1.set point');
    expect(sp[6]).toBeCloseTo(0.4, 12);
    expect(sp[12]).toBeCloseTo(0.45, 9);
    expect(last(sp)).toBeCloseTo(0.5, 12);
    expect(Math.abs(last(column(r, 'raffinate.copper')) - 0.5)).toBeLessThan(0.02);
  });

  it('gives way to an upset that puts it in manual, and goes on afterwards without a bump', () => {
    const r = run(plant(loop(), up('at: 2 h, change: lean.flow, by: +20 %, for: 3 h, put: AIC-1 in manual')));
    const flow = column(r, 'lean.flow');
    // A fifth more than what the loop had come to.
    expect(flow[24]).toBeCloseTo(1.2 * flow[0], 9);
    expect(r.loops[0].automaticAtEnd).toBe(true);
    // Back in service it goes on from the flow as it is then.
    expect(column(r, 'AIC-1.output')[30]).toBeCloseTo(column(r, 'AIC-1.output')[0], 9);
    expect(last(column(r, 'raffinate.copper'))).toBeGreaterThan(0.3);
  });

  it('goes to manual and back as the operator says', () => {
    const r = run(plant(loop(), up('at: 2 h, change: AIC-1.mode, to: manual')));
    expect(r.loops[0].automaticAtEnd).toBe(false);
    expect(r.loops[0].automatic).toBeCloseTo(7200, 6);
  });

  it('acts before the harm with feedforward, in either form', () => {
    const upset = up('at: 61 min, change: liquor.copper, by: +10 %');
    const worst = (more: string): number =>
      Math.max(...column(run(plant(loop(more), upset)), 'raffinate.copper'));
    const bare = worst('');
    expect(
      worst(
        '    feedforward: {from: liquor.copper, analyser: {every: 10 min, delay: 2 min}, gain: 0.15 per g/L}\n',
      ),
    ).toBeLessThan(bare - 0.01);
    expect(
      worst(
        '    feedforward: {from: liquor.copper, analyser: {every: 10 min, delay: 2 min}, form: multiply}\n',
      ),
    ).toBeLessThan(bare - 0.01);
  });

  it('runs on a scan, moves a flow itself, and filters the wild flow', () => {
    const scan = run(
      plant(loop('', ', runs: every 1 s'), up('at: 61 min, change: liquor.copper, by: +10 %')),
    );
    expect(Math.abs(last(column(scan, 'raffinate.copper')) - 0.4)).toBeLessThan(0.01);
    const flow = loop()
      .replace(
        'ratio: lean.flow / liquor.flow, low: 0.4, high: 2',
        'flow: lean.flow, low: 200 m^3/h, high: 800 m^3/h, slew: 5 m^3/h per min',
      )
      .replace('0.3 per g/L', '120 m^3/h per g/L');
    const r = run(plant(flow, up('at: 61 min, change: liquor.copper, by: +10 %')));
    expect(Math.abs(last(column(r, 'raffinate.copper')) - 0.4)).toBeLessThan(0.01);
    const filtered = run(
      plant(loop('', '', ', flow_filter: 10 min'), up('at: 1 h, change: liquor.flow, by: +20 %')),
    );
    expect(Math.abs(last(column(filtered, 'raffinate.copper')) - 0.4)).toBeLessThan(0.02);
  });
});

describe('a cascade', () => {
  const text = `loops:
  AIC-2:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 2, flow_lag: 20 s}
    keep_at: 0.4 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min}
  AIC-1:
    measure: {of: loaded.copper, analyser: {every: 30 min, delay: 20 min}}
    move: {set_point: AIC-2, low: 0.1 g/L, high: 1 g/L}
    keep_at: 7.65 g/L
    controller: {action: reverse, gain: 0.1 g/L per g/L, integral_time: 2 h}
`;
  it('rests with the outer loop at its set point and the inner one where that leads it', () => {
    const r = steady(plant(text));
    expect(r.loops[1].measurement).toBeCloseTo(7.65, 8);
    expect(r.loops[0].setPoint).toBeCloseTo(r.loops[0].measurement, 12);
  });
  it('stays there, and comes back after an upset', () => {
    const s = plant(text, up('at: 1 h, change: liquor.copper, by: +3 %'));
    const r = run({ ...s, horizon: 40 * 3600 });
    expect(Math.abs(last(column(r, 'loaded.copper')) - 7.65)).toBeLessThan(0.03);
    const still = run(plant(text));
    const sp = column(still, 'AIC-2.set point');
    expect(Math.max(...sp) - Math.min(...sp)).toBeLessThan(1e-7);
  });
});

describe('the joined System', () => {
  it.each([
    ['with a lag and a filter', ', flow_filter: 5 min', ''],
    ['passing flows on at once', '', 'flow_lag: 20 s'],
  ])('has exact derivatives %s', (_, move, without) => {
    const text = without ? loop().replace(`, ${without}`, '') : loop('', '', move);
    const { plant: p } = controlled(plant(text, up('at: 1 h, change: liquor.flow, by: +1 %')));
    const { system, parameters } = p;
    const x = p.barren.map((v, i) => v + 0.3 * system.places[i].scale * (1 + (i % 3)));
    const w = Float64Array.from(p.inputs);
    // Half in service: every term of the station counts.
    w[system.inputs.findIndex((q) => q.path.endsWith('in service'))] = 0.6;
    const dense = (pattern: typeof system.A, values: Float64Array, row: number, column: number): number => {
      for (let k = pattern.rowStart[row]; k < pattern.rowStart[row + 1]; k++)
        if (pattern.column[k] === column) return values[k];
      return 0;
    };
    const a = new Float64Array(system.A.column.length);
    const b = new Float64Array(system.B.column.length);
    const c = new Float64Array(system.C.column.length);
    const d = new Float64Array(system.D.column.length);
    system.jacobian(x, w, parameters, a);
    system.byInput(x, w, parameters, b);
    system.byOutput(x, w, parameters, c, d);
    const difference = (
      f: (x: Float64Array, w: Float64Array, to: Float64Array) => void,
      n: number,
      of: 'x' | 'w',
      i: number,
      h: number,
    ) => {
      const at = (s: number): Float64Array => {
        const [u, v] = [Float64Array.from(x), Float64Array.from(w)];
        (of === 'x' ? u : v)[i] += s;
        const y = new Float64Array(n);
        f(u, v, y);
        return y;
      };
      const [hi, lo] = [at(h), at(-h)];
      return hi.map((v, k) => (v - lo[k]) / (2 * h));
    };
    const rhs = (u: Float64Array, v: Float64Array, to: Float64Array): void =>
      system.rhs(u, v, parameters, to);
    const out = (u: Float64Array, v: Float64Array, to: Float64Array): void =>
      system.output(u, v, parameters, to);
    const n = system.places.length;
    const m = system.outputs.length;
    const same = (exact: number, seen: number, size: number): void =>
      expect(Math.abs(exact - seen)).toBeLessThan(2e-6 * size + 1e-6 * Math.abs(exact));
    const check = (of: 'x' | 'w', count: number, scale: (i: number) => number): void => {
      for (let i = 0; i < count; i++) {
        const h = 1e-4 * scale(i);
        const [r, y] = [difference(rhs, n, of, i, h), difference(out, m, of, i, h)];
        r.forEach((v, k) => {
          same(
            of === 'x' ? dense(system.A, a, k, i) : dense(system.B, b, k, i),
            v,
            system.places[k].scale / scale(i),
          );
        });
        y.forEach((v, k) => {
          same(
            of === 'x' ? dense(system.C, c, k, i) : dense(system.D, d, k, i),
            v,
            system.outputs[k].scale / scale(i),
          );
        });
      }
    };
    check('x', n, (i) => Math.abs(x[i]) + system.places[i].scale);
    check('w', system.inputs.length, (i) => Math.abs(w[i]) + system.inputs[i].scale);
  });
});

describe('what overrules a loop', () => {
  it('a tripped pump counts as a limit: the integral does not wind up, and the loop comes back', () => {
    const s = scenario('saltbush-loop');
    const trip = {
      at: 2 * 3600,
      quantity: 'organic tank.pump',
      how: { to: 0 },
      over: 0,
      lasts: 40 * 60,
      words: 'organic tank.pump tripped',
    };
    const r = run({ ...s, upsets: [trip] });
    expect(r.complete).toBe(true);
    const u = column(r, 'AIC-101.output');
    expect(u.every((v) => v >= 0.7 && v <= 1.5)).toBe(true);
    expect(Math.abs(last(column(r, 'raffinate.copper')) - 0.28)).toBeLessThan(0.05);
    for (const c of r.closures) expect(c.closure).toBeLessThan(1e-9);
  });
});

it.each(['rodas4', 'odex'])('%s follows the loop alike', (integrator) => {
  const s = { ...scenario('saltbush-loop'), horizon: 6 * 3600 };
  const one = column(run(s, { integrator: 'rodas5p', tolerance: 1e-8 }), 'raffinate.copper');
  const other = column(run(s, { integrator, tolerance: 1e-8 }), 'raffinate.copper');
  other.forEach((v, k) => {
    expect(Math.abs(v - one[k])).toBeLessThan(1e-6);
  });
});
