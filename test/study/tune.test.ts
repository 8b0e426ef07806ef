import { Ajv2020 } from 'ajv/dist/2020.js';
import { beforeAll, describe, expect, it } from 'vitest';
import { restGains } from '../../src/control/linearise.ts';
import { tunePictures } from '../../src/report/pictures/tune.ts';
import { runSummary } from '../../src/report/summary.ts';
import { summarySchema } from '../../src/report/summary-schema.ts';
import { tuneScreen } from '../../src/report/tune-screen.ts';
import { tuneSummary } from '../../src/report/tune-summary.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import { steadyState } from '../../src/solve/steady.ts';
import { run } from '../../src/study/run.ts';
import { checkAction, type Tuned, tune } from '../../src/study/tune/tune.ts';
import { scenario } from '../support/plants.ts';

const usual = { sensitivity: 1.6, range: 0.3 };
const origin = { file: 'x.yaml', version: '0', seconds: 0 };
let r: Tuned;
beforeAll(() => {
  r = tune(scenario('saltbush-loop'), usual) as Tuned;
}, 60_000);

const changed = (controller: object, move: object = {}, keepAt?: number) => {
  const s = scenario('saltbush-loop');
  return {
    ...s,
    loops: (s.loops ?? []).map((l) => ({
      ...l,
      controller: { ...l.controller, ...controller },
      move: { ...l.move, ...move },
      keepAt: keepAt ?? l.keepAt,
    })),
  };
};

describe('tune on the copper circuit', () => {
  it('finds the gain at rest that two steady states give', () => {
    const { plant, loops } = r.joined;
    const { spec } = loops[0];
    const at = (output: number): number => {
      const w = Float64Array.from(plant.inputs);
      w[spec.inputs.output] = output;
      const found = steadyState(plant.system, w, plant.parameters, plant.barren);
      if (!found.found) return Number.NaN;
      const y = new Float64Array(plant.system.outputs.length);
      plant.system.output(found.state, w, plant.parameters, y);
      return y[spec.measured];
    };
    const u = r.atRest.output;
    const gain = (at(u + 1e-3) - at(u - 1e-3)) / 2e-3;
    expect(Math.abs((r.point.restGain as number) / gain - 1)).toBeLessThan(1e-4);
    expect(restGains(r.point.plant)?.[0][0]).toBe(r.point.restGain);
  });

  it('steps the full plant both ways within its band, and the larger gain is the one it tunes on', () => {
    expect(r.tests.map((t) => t.name)).toEqual(['up', 'down']);
    for (const t of r.tests) {
      expect(Math.max(...t.test.values.map(Math.abs))).toBeLessThan(0.2 * 0.28 * 1.01);
      expect(t.fit?.error).toBeLessThan(0.02);
    }
    const gains = [...r.tests.map((t) => Math.abs(t.fit?.gain ?? 0)), Math.abs(r.point.fit.gain)];
    expect(r.model.gain).toBe(Math.max(...gains));
    // The gain at rest lies between those of a step up and a step down.
    expect(Math.abs(r.point.restGain as number)).toBeGreaterThan(Math.min(gains[0], gains[1]));
    expect(Math.abs(r.point.restGain as number)).toBeLessThan(Math.max(gains[0], gains[1]));
  });

  it('keeps its own optimum at the sensitivity asked for, and finds it no worse than SIMC', () => {
    const own = r.candidates.find((c) => c.name === 'own optimum');
    expect(own?.margins.sensitivity).toBeLessThan(1.61);
    expect(own?.margins.sensitivity).toBeGreaterThan(1.55);
    const iae = (name: string): number => r.proofs.find((p) => p.name === name)?.iae ?? Number.NaN;
    expect(iae('own optimum')).toBeLessThan(iae('SIMC'));
    expect(iae('SIMC')).toBeLessThan(iae('manual'));
  });

  it('never puts a reference forward, and takes manual as the base line', () => {
    expect(r.best.candidate.reference).toBe(false);
    expect(r.proofs.some((p) => p.candidate?.reference)).toBe(false);
    const manual = r.proofs.find((p) => p.name === 'manual');
    expect(manual?.travel).toBe(0);
    expect(manual?.solvent).toBe(0);
    expect(manual?.beyond).toBeGreaterThan(100);
  });

  it('no output ever leaves its limits', () => {
    for (const p of r.proofs) {
      expect(Math.max(...p.trial.trace.output)).toBeLessThanOrEqual(1.5 + 1e-12);
      expect(Math.min(...p.trial.trace.output)).toBeGreaterThanOrEqual(0.7 - 1e-12);
    }
  });

  it('a gain beyond its margin is told unstable, and not put to the proof', () => {
    const simc = r.candidates.find((c) => c.name === 'SIMC');
    const factor = (simc?.margins.gain ?? 1) * 1.25;
    const s = changed({
      gain: (simc?.settings.gain ?? 0) * factor,
      integralTime: simc?.settings.integralTime,
    });
    const t = tune(s, usual) as Tuned;
    expect(t.candidates.find((c) => c.name === 'as set')?.margins.stable).toBe(false);
    expect(t.proofs.some((p) => p.name === 'as set')).toBe(false);
  });

  it('keeps the limit at the set point that it backs off to, and no longer just above', () => {
    expect(r.backOff?.setPoint).toBeGreaterThan(0.28);
    expect(r.backOff?.worst).toBeLessThanOrEqual(0.45);
    expect(r.backOff?.worst).toBeGreaterThan(0.43);
    expect(r.backOff?.flow).toBeLessThan(0);
  });

  it('feedforward has the gain of the two steady states, and brings the worst down', () => {
    const [a] = r.ahead;
    const [gp, gd] = restGains(r.point.plant)?.[0] ?? [];
    expect(a.gain).toBeCloseTo(-gd / gp, 9);
    expect(a.proof.worst).toBeLessThan(r.best.worst);
  });

  it('maps throughput and grade together, and a point of it is what the plant has there', () => {
    const { points, throughput, grade } = r.map;
    expect(points).toHaveLength(45);
    const p = points.find((q) => q.throughput < 1 && q.grade > 1 && q.output > 1) as (typeof points)[number];
    const { plant, loops } = r.joined;
    const { spec } = loops[0];
    const at = (output: number): number => {
      const w = Float64Array.from(plant.inputs);
      w[plant.system.inputs.findIndex((q) => q.path === throughput)] *= 0.7;
      w[plant.system.inputs.findIndex((q) => q.path === grade)] *= 1.3;
      w[spec.inputs.output] = output;
      const found = steadyState(plant.system, w, plant.parameters, plant.barren);
      if (!found.found) return Number.NaN;
      const y = new Float64Array(plant.system.outputs.length);
      plant.system.output(found.state, w, plant.parameters, y);
      return y[spec.measured];
    };
    expect(at(p.output)).toBeCloseTo(p.measurement, 8);
    const gain = (at(p.output + 1e-3) - at(p.output - 1e-3)) / 2e-3;
    expect(Math.abs((p.gain as number) / gain - 1)).toBeLessThan(1e-3);
  });

  it('gives the response from every move and upset to the measurement: at rest the gains of two steady states', () => {
    const { omegas, list } = r.responses;
    expect(list.map((q) => q.from)).toEqual(['AIC-101.output', 'leach liquor.flow', 'leach liquor.copper']);
    for (const q of list) {
      expect(q.to).toBe('raffinate.copper');
      // A period of a week is nearly rest, where |G| is the gain and the angle 0 or half a turn.
      expect(Math.abs(q.magnitudes[0] / Math.abs(q.restGain as number) - 1)).toBeLessThan(0.01);
      expect(Math.abs(Math.cos(q.angles[0]) - Math.sign(q.restGain as number))).toBeLessThan(0.01);
      expect(q.magnitudes[omegas.length - 1]).toBeLessThan(0.02 * q.magnitudes[0]);
    }
    // The move's own response is the one that the settings were chosen by.
    const own = r.point.response(omegas[12])[0];
    expect(Math.hypot(own.re, own.im)).toBeCloseTo(list[0].magnitudes[12], 9);
  });

  it('writes what its schema says', () => {
    const ajv = new Ajv2020({ strict: false });
    const valid = ajv.compile(summarySchema);
    const unreachable = tune(changed({}, { high: 0.75 }), usual);
    const ran = runSummary(run({ ...scenario('saltbush-loop'), horizon: 3600 }), origin);
    for (const s of [tuneSummary(r, origin), tuneSummary(unreachable, origin), ran]) {
      const plain = JSON.parse(JSON.stringify(s));
      expect(valid(plain), JSON.stringify(valid.errors)).toBe(true);
    }
  });

  it('says the answer first, in thirty-odd lines', () => {
    const lines = tuneScreen(r);
    expect(lines[0]).toMatch(
      /^LOOP {2}AIC-101 {2}raffinate\.copper -> organic tank\.flow \/ leach liquor\.flow, keep at 0\.280 g\/L/,
    );
    expect(lines[1]).toMatch(/^Use gain .* ratio per g\/L, integral time .* min, direct, PI on each result/);
    expect(lines.slice(3, 6).join(' ')).toContain('WARNING gain falls');
    expect(lines.length).toBeLessThan(36);
    expect(lines.join('\n')).not.toMatch(/NaN|Infinity|undefined/);
  });

  it('draws five pictures that are not blank', async () => {
    const names: string[] = [];
    for await (const p of tunePictures(r)) {
      names.push(p.name);
      expect(p.png.length).toBeGreaterThan(20_000);
    }
    expect(names).toEqual([
      'closed-loops.png',
      'step-tests.png',
      'nyquist.png',
      'bode.png',
      'margin-map.png',
    ]);
  });
});

describe('tune refuses', () => {
  it('the wrong action, with the gain that says so', () => {
    expect(() => tune(changed({ action: 'reverse' }), usual)).toThrow(Refusal);
    expect(() => tune(changed({ action: 'reverse' }), usual)).toThrow(
      /controller\.action: wrong action: the gain of the plant is -0\.508/,
    );
  });
  it('a gain that changes its sign between one hour and rest, and prints both', () => {
    const point = { restGain: 0.2, hourGain: -0.4 };
    expect(() => checkAction(scenario('saltbush-loop'), 0, point)).toThrow(
      /one hour after a step the gain is -0\.400, at rest \+0\.200/,
    );
    expect(() => checkAction(scenario('saltbush-loop'), 0, { restGain: null, hourGain: -0.4 })).not.toThrow();
  });
  it('where there is no loop, or none of that name', () => {
    expect(() => tune(scenario('saltbush-copper'), usual)).toThrow(/no loop to tune/);
    expect(() => tune(scenario('saltbush-loop'), { ...usual, loop: 'AIC-9' })).toThrow(/AIC-101/);
  });
  it('nothing where the set point cannot be reached: that is the answer', () => {
    const q = tune(changed({}, { high: 0.75 }), usual);
    expect(q.kind).toBe('unreachable');
    expect(q.atRest.binds).toBe('high');
    expect(tuneScreen(q)[0]).toContain('the high limit of the output binds');
  });
});
