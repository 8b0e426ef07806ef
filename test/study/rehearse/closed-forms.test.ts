import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../../src/scenario/scenario.ts';
import { ground } from '../../../src/study/rehearse/ground.ts';
import { judge } from '../../../src/study/rehearse/judge.ts';
import { followedOutputs, rehearse } from '../../../src/study/rehearse/rehearse.ts';
import { run, usual } from '../../../src/study/run.ts';
import { fromText } from '../../support/plants.ts';
import { filled, STAY, tanksInSeries } from './tanks-in-series.ts';

const HOUR = 3600;
const outputOf = (s: Scenario, path: string): number =>
  ground(s, usual).plant.system.outputs.findIndex((o) => o.path === path);

describe('a pulse through tanks in series', () => {
  const long = 1800;
  const s = (n: number): Scenario =>
    tanksInSeries(
      n,
      `horizon: 8 h
upsets: [{at: 1 h, change: brine.salt, by: +3 g/L, for: 30 min}]
limits: [{keep: outlet.salt, below: 6 g/L}]
`,
    );

  it.each([2, 3, 5, 8])('%i tanks: worst value and its time', (n) => {
    // y(t) = F(t) − F(t − d); at the peak f(t) = f(t − d), so that t/(t − d) = e^(d/((n − 1)τ)) (derived here).
    const peak = long / (1 - Math.exp(-long / ((n - 1) * STAY)));
    const height = 5 + 3 * (filled(n, peak) - filled(n, peak - long));
    const { limits } = rehearse(s(n)).nothing;
    expect(limits[0].worst.value).toBeCloseTo(height, 4);
    expect(Math.abs(limits[0].worst.time - HOUR - peak)).toBeLessThan(15);
  });

  it('break and return where the closed form passes the limit, and kg above it by its integral', () => {
    const n = 3;
    const y = (t: number): number => 5 + 3 * (filled(n, t) - filled(n, t - long));
    const [l] = rehearse(s(n)).nothing.limits;
    const broken = (l.breaks?.time ?? 0) - HOUR;
    const back = (l.back ?? 0) - HOUR;
    expect(y(broken)).toBeCloseTo(6, 4);
    expect(y(back)).toBeCloseTo(6, 4);
    let kg = 0;
    const steps = 4000;
    for (let i = 0; i < steps; i++)
      kg += (y(broken + ((i + 0.5) * (back - broken)) / steps) - 6) * (60 / HOUR);
    expect(l.beyond).toBeCloseTo((kg * (back - broken)) / steps, 3);
    expect(l.volume).toBeCloseTo(((back - broken) * 60) / HOUR, 2);
    // What came in more goes out more: 3 g/L in 30 m³, less what has not left by the end.
    expect(l.more).toBeCloseTo(90, 2);
    // Recovered: the tail is below 2 % of the peak departure for good.
    const peak = long / (1 - Math.exp(-long / ((n - 1) * STAY)));
    expect(y((l.recovered ?? 0) - HOUR) - 5).toBeCloseTo(0.02 * (y(peak) - 5), 3);
  });

  it('the plant absorbs unaided what the closed form says', () => {
    const n = 3;
    const r = rehearse(s(n));
    const peak = long / (1 - Math.exp(-long / ((n - 1) * STAY)));
    const most = 1 / (3 * (filled(n, peak) - filled(n, peak - long)));
    const [size] = r.unaided.sizes ?? [];
    expect(size.from).toBe(0);
    expect(size.toBracket?.[0]).toBeLessThanOrEqual(most + 1e-5);
    expect(size.toBracket?.[1]).toBeGreaterThanOrEqual(most - 1e-5);
    const heightOf = (d: number): number => {
      const t = d / (1 - Math.exp(-d / ((n - 1) * STAY)));
      return 3 * (filled(n, t) - filled(n, t - d));
    };
    const [duration] = r.unaided.durations;
    expect(heightOf((duration.toBracket?.[0] ?? 0) * r.duration)).toBeLessThanOrEqual(1 + 1e-4);
    expect(heightOf((duration.toBracket?.[1] ?? 0) * r.duration)).toBeGreaterThanOrEqual(1 - 1e-4);
  });
});

describe('a linear plant', () => {
  const s = (upsets: string): Scenario =>
    fromText(`title: Linear plant
solutes: [copper]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}
trains:
  extraction:
    stages: 3
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: ratio, ratio: 3}}
horizon: 10 h
upsets: [${upsets}]
limits: [{keep: raffinate.copper, below: 2 g/L}]
`);
  const first = '{at: 1 h, change: liquor.copper, by: +35 %, over: 30 min, for: 3 h}';
  const second = '{at: 2 h, change: lean.copper, by: +0.5 g/L, for: 2 h}';

  it('answers two upsets with the sum of its answers to each', () => {
    const output = outputOf(s(first), 'raffinate.copper');
    const courses = [`${first}, ${second}`, first, second].map((u) => {
      const g = ground(s(u), usual);
      return judge(g, g.changes, usual, followedOutputs(g)).courses;
    });
    const calm = courses[0].value(output, 0);
    for (let t = 2.1; t <= 10; t += 0.37) {
      const [both, one, other] = courses.map((c) => c.value(output, t * HOUR) - calm);
      expect(both).toBeCloseTo(one + other, 5);
    }
  });
});

describe('the copper circuit with a rich feed', () => {
  const circuit = (extraction: string, strip: string): Scenario =>
    fromText(
      `title: Copper circuit
solutes: [copper]
species: [acid]
feeds:
  leach liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L}
  spent electrolyte: {phase: aqueous, flow: 135 m^3/h, copper: 35 g/L, acid: 185 g/L}
tanks:
  organic tank: {phase: organic, from: stripped organic, to: lean organic, volume: 260 m^3, filled: 70 %, flow: 430 m^3/h}
trains:
  extraction:
    stages: 3
    aqueous: leach liquor -> raffinate
    organic: lean organic -> loaded organic
    mixer: {volume: 42 m^3, continuity: organic, ${extraction}}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m, tanks_in_series: 3}
    equilibrium: &c {copper: {law: exchange, constant: 16, extractant: 10.5 g/L, p: 2, q: 2, releases: {acid: 1.543}}}
  strip:
    stages: 1
    aqueous: spent electrolyte -> rich electrolyte
    organic: loaded organic -> stripped organic
    mixer: {volume: 20 m^3, continuity: organic, ${strip}}
    settler: {area: 125 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m, tanks_in_series: 3}
    equilibrium: *c
    initial: {aqueous: as entering}
start: steady
horizon: 10 h
upsets: [{at: 30 min, change: leach liquor.copper, by: +35 %, over: 30 min, for: 4 h}]
limits: [{keep: raffinate.copper, below: 0.6 g/L}]
answers:
  more organic: {start: 40 min after upset, moves: [{change: organic tank.flow, by: +15 %}]}
`,
    );
  const EFFICIENCY = 'stage_efficiency: 94 %';
  // k·a·V/Q_a = E/(1 − E) at the design flows.
  const fixed = (flow: number, volume: number): string =>
    `ka: {value: ${(0.94 / 0.06) * (flow / 3600 / volume)} 1/s, fixed: true}`;

  it('breaks, peaks and is held where the worked figures of the plant say', () => {
    // From an independent model of the same circuit (SciPy), to its printed digits.
    const r = rehearse(circuit(EFFICIENCY, EFFICIENCY));
    const [l] = r.nothing.limits;
    expect(l.worst.value).toBeCloseTo(0.72, 3);
    expect((l.worst.time - r.ground.first) / HOUR).toBeCloseTo(4.3, 1);
    expect((l.breaks?.after ?? 0) / HOUR).toBeCloseTo(1.9, 1);
    expect(((l.back ?? 0) - r.ground.first) / HOUR).toBeCloseTo(4.7, 1);
    expect(r.answers[0].figures.kept).toBe(true);
    expect(r.answers[0].figures.limits[0].worst.value).toBeCloseTo(0.5638, 3);
  });

  it('is held at 0.559 with a constant area', () => {
    const r = rehearse(circuit(fixed(420, 42), fixed(135, 20)));
    expect(r.answers[0].figures.limits[0].worst.value).toBeCloseTo(0.559, 3);
  });

  it('its latest start is kept a second before and broken a second after, by plain runs', () => {
    const s = circuit(EFFICIENCY, EFFICIENCY);
    const r = rehearse(s);
    const [kept, broken] = r.answers[0].bounds?.starts[0].toBracket ?? [0, 0];
    expect(broken - kept).toBeGreaterThan(0);
    expect(broken - kept).toBeLessThanOrEqual(10);
    const spells = (start: number): number => {
      const [move] = s.rehearsing?.answers[0].steps[0].moves ?? [];
      return run({ ...s, upsets: [...s.upsets, { ...move, at: start }] }).limits[0].spells.length;
    };
    expect(spells(kept - 1)).toBe(0);
    expect(spells(broken + 1)).toBe(1);
  });
});
