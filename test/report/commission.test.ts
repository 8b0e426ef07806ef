import { Ajv2020 } from 'ajv/dist/2020.js';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { commissionScreen } from '../../src/report/commission-screen.ts';
import { commissionSummary } from '../../src/report/commission-summary.ts';
import { commissioningLines } from '../../src/report/commissioning-lines.ts';
import { approach } from '../../src/report/pictures/approach.ts';
import { fan } from '../../src/report/pictures/fan.ts';
import { commissionPictures } from '../../src/report/pictures/index.ts';
import { timeline } from '../../src/report/pictures/timeline.ts';
import { summarySchema } from '../../src/report/summary-schema.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { type CommissionResult, commission } from '../../src/study/commission/commission.ts';
import { ensemble } from '../../src/study/commission/ensemble.ts';
import { samples } from '../../src/study/commission/sample.ts';
import { usual } from '../../src/study/run.ts';
import { anyCircuit } from '../plant/any-circuit.ts';
import { anyPlant } from '../plant/any-plant.ts';
import { scenario } from '../support/plants.ts';

// General-purpose JSON Schema validator (draft 2020-12).
const validate = new Ajv2020({ strict: false, allErrors: true, allowUnionTypes: true }).compile(
  summarySchema,
);
const origin = { file: 'a.yaml', version: '0.0.0', seconds: 1 };
const throughJson = (v: object): Record<string, unknown> => JSON.parse(JSON.stringify(v));
const plainly = (s: Scenario): CommissionResult => ({ ...commission(s, usual), ensemble: null });

let full: CommissionResult;
beforeAll(async () => {
  const s = scenario('saltbush-startup');
  const found = commission(s, usual);
  const settings = { ...usual, ...(found.fan as NonNullable<typeof found.fan>), runs: 10, seed: 1 };
  const spread = await ensemble(
    found.proper,
    s.commissioning?.uncertain ?? [],
    settings,
    async (batches, done) => {
      for (const [b, q] of batches.entries()) done(b, samples(q));
    },
  );
  full = { ...found, ensemble: spread };
});

describe('summary.json of a commissioning', () => {
  it('fits its schema with everything in it, and with next to nothing', () => {
    for (const r of [full, plainly(scenario('ten')), plainly(scenario('saltbush-vessels'))]) {
      expect(validate(throughJson(commissionSummary(r, origin))), JSON.stringify(validate.errors)).toBe(true);
    }
  });

  it('fits it where the plant does not settle, and says so', () => {
    const s = scenario('saltbush-copper');
    // More is pumped than comes back: the tank runs dry, its pump stops and starts again.
    const tanks = s.tanks.map((t) => ({ ...t, from: 'solvent', held: 40 }));
    const feeds = [...s.feeds, { name: 'solvent', phase: 'organic', flow: 0.06, content: [0, 0] } as const];
    const r = plainly({ ...s, feeds, tanks, upsets: [], horizon: 12 * 3600 });
    const summary = throughJson(commissionSummary(r, origin));
    expect(validate(summary), JSON.stringify(validate.errors)).toBe(true);
    expect(summary).toMatchObject({ settled: false, steady_s: null });
    expect(commissionScreen(r).join('\n')).toMatch(
      /DOES NOT SETTLE {2}\d+ events in the second half of \d+ h, the last: organic tank /,
    );
  });

  it('tells the times that the screen tells', () => {
    const summary = throughJson(commissionSummary(full, origin)) as {
      steady_s: number;
      comes_good: { quantity: string; within_10_5_2_1_percent_of_change_s: number[] }[];
    };
    const raffinate = summary.comes_good.find((q) => q.quantity === 'raffinate.copper');
    expect(raffinate?.within_10_5_2_1_percent_of_change_s[3]).toBe(summary.steady_s);
    expect(commissionScreen(full)[1]).toContain('At rest at 4 h 45 min');
  });
});

describe('random plants', () => {
  it('give figures and words, and nothing that is no number', () => {
    fc.assert(
      fc.property(fc.oneof(anyPlant, anyCircuit), (s) => {
        const moves = s.upsets.map((u, i) => ({ ...u, at: i % 2 === 0 ? 0 : u.at }));
        const limits = [
          { stream: s.trains[0].aqueous.to, quantity: s.solutes[0], side: 'below', value: 1, from: 0 },
        ] as const;
        const r = plainly({ ...s, upsets: moves, limits });
        expect(commissionScreen(r).join('\n')).not.toMatch(/NaN|undefined|Infinity|null/);
        expect(validate(throughJson(commissionSummary(r, origin))), JSON.stringify(validate.errors)).toBe(
          true,
        );
        for (const p of [approach, timeline])
          if (p.parts?.(r).length) expect(JSON.stringify(p.config(r).data)).not.toMatch(/undefined/);
      }),
      { numRuns: 15, seed: 11 },
    );
  }, 120_000);
});

describe('the screen', () => {
  it('answers first, in words, and stays short', () => {
    const lines = commissionScreen(full);
    expect(lines[0]).toMatch(
      /^START-UP {2}Saltbush Flat copper circuit, start-up: from barren; 420 m\^3\/h leach liquor/,
    );
    expect(lines.length).toBeLessThanOrEqual(33);
    expect(commissionScreen(plainly(scenario('ten'))).length).toBeLessThanOrEqual(20);
    const text = lines.join('\n');
    expect(text).toContain('a barren outlet proves nothing');
    expect(text).toContain('Fastest start: preloaded organic');
    expect(text).toContain('P10 ');
    expect(text).not.toMatch(/NaN|undefined|Infinity|null/);
  });

  it('says what was left out, and when the horizon was too short', () => {
    const short = commissionScreen(plainly({ ...scenario('saltbush-copper'), horizon: 3600 })).join('\n');
    expect(short).toMatch(/The horizon of 1 h was too short for all of the plant; it was run to \d+ h/);
    expect(short).toContain(
      'Left out, because it comes later: leach liquor.copper +35 %; extraction.2.mixer stopped.',
    );
  });
});

describe('pictures of a commissioning', () => {
  it('are drawn where they have something to show', async () => {
    const names: string[] = [];
    for await (const p of commissionPictures(full)) {
      names.push(p.name);
      expect(p.png.length).toBeGreaterThan(20_000);
    }
    expect(names).toEqual([
      'approach.png',
      'timeline.png',
      'map-extraction-copper.png',
      'ensemble.png',
      'comparison.png',
    ]);
    expect(fan.parts?.(plainly(scenario('ten')))).toEqual([]);
  });

  it('the approach passes 1 % where the summary says', () => {
    const config = approach.config(full);
    const line = config.data.datasets.find((d) => d.label === 'raffinate.copper')?.data as {
      x: number;
      y: number;
    }[];
    const after = line.findIndex((p) => p.y <= 1);
    expect(Math.abs(line[after].x - (full.steady as number) / 3600)).toBeLessThan(0.02);
    const plugins = config.options?.plugins as unknown as {
      annotation: { annotations: Record<string, { yMin?: number }> };
    };
    expect([10, 5, 2, 1].map((b) => plugins.annotation.annotations[`band${b}`].yMin)).toEqual([10, 5, 2, 1]);
  });

  it('the timeline has a bar for every outlet, tank and stage, the last at the foot', () => {
    const config = timeline.config(full);
    const labels = config.data.labels as string[];
    for (const name of ['raffinate.copper', 'organic tank.copper', 'stage extraction.2', 'stage strip.1'])
      expect(labels).toContain(name);
    const ends = (config.data.datasets[3].data as unknown as [number, number][]).map((b) => b[1]);
    expect(ends).toEqual([...ends].sort((a, b) => a - b));
    expect(config.options?.scales?.x).toMatchObject({
      title: { text: [expect.stringMatching(/^time \[h\]/), expect.any(String)] },
    });
  });
});

describe('check', () => {
  it('shows what is stated for the commissioning as it was understood, and nothing where nothing is', () => {
    const lines = commissioningLines(scenario('saltbush-startup')).join('\n');
    expect(lines).toContain('half the feed first: leach liquor.flow -50 %, 0 s to 1 h 30 min');
    expect(lines).toContain('preloaded organic: organic tank, extraction, strip filled otherwise');
    expect(lines).toContain('samples 1 h apart, repeatable to 2.00 %');
    expect(lines).toContain('12 plant samples of organic tank.copper, 30 min to 6 h 30 min');
    expect(commissioningLines(scenario('ten'))).toEqual([]);
  });
});
