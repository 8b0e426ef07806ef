import { Ajv2020 } from 'ajv/dist/2020.js';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { answers } from '../../src/report/pictures/answers.ts';
import { rehearsePictures, rehearseTable } from '../../src/report/pictures/index.ts';
import { rehearseScreen } from '../../src/report/rehearse-screen.ts';
import { rehearseSummary } from '../../src/report/rehearse-summary.ts';
import { rehearsingLines } from '../../src/report/rehearsing-lines.ts';
import { summarySchema } from '../../src/report/summary-schema.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { mapColumns, type StartSizeMap, startSizeMap } from '../../src/study/rehearse/map.ts';
import { type RehearseResult, rehearse } from '../../src/study/rehearse/rehearse.ts';
import { anyPlant } from '../plant/any-plant.ts';
import { sound } from '../scenario/wrong.ts';
import { fromText, scenario } from '../support/plants.ts';

const validate = new Ajv2020({ strict: false, allErrors: true, allowUnionTypes: true }).compile(
  summarySchema,
);
const origin = { file: 'a.yaml', version: '0.0.0', seconds: 1 };
const throughJson = (v: object): Record<string, unknown> => JSON.parse(JSON.stringify(v));
const fits = (r: RehearseResult, map: StartSizeMap | null = null): void => {
  expect(validate(throughJson(rehearseSummary(r, origin, map))), JSON.stringify(validate.errors)).toBe(true);
};

let full: RehearseResult;
let map: StartSizeMap;
beforeAll(async () => {
  full = rehearse(scenario('saltbush-rehearsal'));
  map = await startSizeMap(
    full,
    'more organic',
    { columns: 6, rows: 5, of: 'worst' },
    async (batches, done) => {
      for (const [i, b] of batches.entries()) done(i, mapColumns(b));
    },
  );
});

describe('summary.json of a rehearsal', () => {
  it('fits its schema with everything in it, and with next to nothing', () => {
    fits(full, map);
    fits(rehearse(fromText(sound)));
  });

  it('tells time in hand as the latest start less what can be known', () => {
    const summary = throughJson(rehearseSummary(full, origin)) as {
      answers: { name: string; latest_start_s: number }[];
      who_can_know: {
        source: string;
        earliest_s: number;
        latest_s: number;
        in_hand: { answer: string; at_worst_s: number }[];
      }[];
    };
    const [at101] = summary.who_can_know;
    for (const { answer, at_worst_s } of at101.in_hand) {
      const latest = summary.answers.find((a) => a.name === answer)?.latest_start_s;
      if (latest) expect(at_worst_s).toBeCloseTo(latest - at101.latest_s, 9);
    }
    expect(at101.in_hand[0].at_worst_s).toBeGreaterThan(0);
  });
});

describe('the screen', () => {
  it('says first what one would say at the radio, and stays short', () => {
    const lines = rehearseScreen(full);
    expect(lines.length).toBeLessThanOrEqual(30);
    expect(lines[0]).toBe(
      'REHEARSAL  leach liquor.copper +35 % over 30 min for 4 h; limit raffinate.copper < 0.600 g/L; from steady state',
    );
    const text = lines.join('\n');
    expect(text).toMatch(
      /Nothing done: broken 1 h 54 min after the upset begins \(08:54\), worst 0\.720 g\/L at 4 h 17 min/,
    );
    expect(text).toMatch(/keeps it: worst 0\.548 g\/L,\n {2}if begun within 1 h 4\d min/);
    expect(text).toContain('Who can know in time?');
    expect(text).toMatch(/laboratory .* LATE at best/);
    expect(text).toMatch(/\n4 {2}a little organic .* size\n/);
    expect(text).not.toMatch(/NaN|undefined|Infinity|null/);
  });

  it('says that no answer is needed, or that none helps, and when the plant is not at rest', () => {
    const moving = rehearseScreen(
      rehearse(fromText(`${sound.replace('below: 0.6', 'below: 5')}start: barren\n`)),
    ).join('\n');
    expect(moving).toMatch(/Nothing done: the limit is kept, .* no answer is needed/);
    expect(moving).toMatch(/NOTE {2}the plant is not at rest as the upset begins: \S+ still moves \S+ %\/h/);
    const none = rehearse(
      fromText(
        `${sound.replace('below: 0.6', 'below: 0.7')}answers: {stir: {start: after upset, moves: [{change: liquor.acid, by: +5 %}]}}\n`,
      ),
    );
    expect(rehearseScreen(none).join('\n')).toMatch(/None helps: neither an earlier start nor a larger size/);
  });

  it('ranks by price where prices are stated', () => {
    const s = scenario('saltbush-rehearsal');
    const priced: Scenario = {
      ...s,
      commissioning: {
        samples: null,
        procedures: [],
        uncertain: [],
        compare: null,
        prices: {
          currency: 'USD',
          streams: new Map(),
          solutes: new Map([['copper', 9]]),
          energy: null,
          power: null,
        },
      },
    };
    const r = rehearse(priced);
    // Price times kg lost more than without the upset; what keeps the limit comes first all the same.
    expect(r.nothing.cost).toBeCloseTo(9 * (r.nothing.limits[0].more ?? 0), 6);
    expect(rehearseScreen(r).join('\n')).toContain('USD');
    const kept = r.answers.map((a) => a.figures.kept);
    expect(kept.indexOf(false)).toBe(kept.lastIndexOf(true) + 1);
    fits(r);
  });
});

describe('pictures of a rehearsal', () => {
  it('are drawn where they have something to show', async () => {
    const names: string[] = [];
    for await (const p of rehearsePictures({ result: full, map })) {
      names.push(p.name);
      expect(p.png.length).toBeGreaterThan(20_000);
    }
    expect(names).toEqual(['answers.png', 'ranked.png', 'start-size.png', 'frequency.png']);
  });

  it('nothing done peaks where the summary says, and each answer has one style in all panels', () => {
    const config = answers.config({ result: full, map: null });
    const [nothing] = config.data.datasets as {
      label: string;
      data: { x: number; y: number }[];
      borderColor: string;
    }[];
    const peak = nothing.data.reduce((a, b) => (b.y > a.y ? b : a));
    expect(peak.y).toBeCloseTo(full.nothing.limits[0].worst.value, 3);
    expect(peak.x).toBeCloseTo((full.nothing.limits[0].worst.time - full.ground.first) / 3600, 2);
    const styles = config.data.datasets.map((d) => (d as { borderColor: string }).borderColor);
    expect(styles.slice(5, 10)).toEqual(styles.slice(0, 5));
  });
});

describe('random plants', () => {
  it('give figures and words, and nothing that is no number', () => {
    fc.assert(
      fc.property(anyPlant, fc.double({ min: 0.01, max: 3, noNaN: true }), (s, limit) => {
        if (s.upsets.length === 0) return;
        const [move] = s.upsets;
        const step = {
          name: 'again',
          begins: { after: 60, upset: 1 },
          moves: [{ ...move, at: 0 }],
          ends: null,
        };
        const r = rehearse({
          ...s,
          limits: [
            { stream: s.trains[0].aqueous.to, quantity: s.solutes[0], side: 'below', value: limit, from: 0 },
          ],
          rehearsing: {
            answers: [{ name: 'again', between: 0, steps: [step] }],
            instruments: [],
            variations: [],
            startStated: true,
            timeZero: null,
          },
        });
        expect(rehearseScreen(r).join('\n')).not.toMatch(/NaN|undefined|Infinity|null/);
        fits(r);
        for (const p of rehearseTable)
          if (!p.parts || p.parts({ result: r, map: null }).length > 0)
            expect(JSON.stringify(p.config({ result: r, map: null }).data)).not.toMatch(/undefined/);
      }),
      { numRuns: 12, seed: 4, endOnFailure: true },
    );
  }, 120_000);
});

describe('check', () => {
  it('shows analysers and answers as they were understood, and nothing where nothing is stated', () => {
    const lines = rehearsingLines(scenario('saltbush-rehearsal')).join('\n');
    expect(lines).toContain(
      'AT-101 measures raffinate.copper: a grab every 10 min, known 6 min later, noise 2.00 % of reading, warns at 0.480 g/L',
    );
    expect(lines).toContain('more organic: organic tank.flow +15 %, 40 min after the upset begins');
    expect(lines).toContain('when AT-101 above 0.48 g/L, then after 5 min, taken back 5 h after its start');
    expect(rehearsingLines(scenario('ten'))).toEqual([]);
  });
});
