import { Ajv2020 } from 'ajv/dist/2020.js';
import { describe, expect, it } from 'vitest';
import { runSummary, steadySummary } from '../../src/report/summary.ts';
import { summarySchema } from '../../src/report/summary-schema.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { scenario } from '../support/plants.ts';

// General-purpose JSON Schema validator (draft 2020-12).
const validate = new Ajv2020({ strict: false, allErrors: true }).compile(summarySchema);
const origin = { file: 'a.yaml', version: '0.0.0', seconds: 1 };
const throughJson = (v: object): unknown => JSON.parse(JSON.stringify(v));

describe('summary.json', () => {
  it.each(['saltbush-copper', 'ten', 'wattle-acid-ratio', 'wattle-acid-table'])(
    'of a run of %s fits its schema',
    (name) => {
      const summary = throughJson(runSummary(run(scenario(name)), origin));
      expect(validate(summary), JSON.stringify(validate.errors)).toBe(true);
    },
  );

  it('of a steady state fits its schema', () => {
    const summary = throughJson(steadySummary(steady(scenario('saltbush-copper')), origin));
    expect(validate(summary), JSON.stringify(validate.errors)).toBe(true);
  });

  it('holds no other keys than the schema knows, and all of them', () => {
    const summary = throughJson(steadySummary(steady(scenario('ten')), origin)) as Record<string, unknown>;
    expect(validate({ ...summary, more: 1 })).toBe(false);
    const { drifts: _, ...less } = summary;
    expect(validate(less)).toBe(false);
  });

  it('tells the same break of the limit as the run', () => {
    const result = run(scenario('saltbush-copper'));
    const summary = throughJson(runSummary(result, origin)) as {
      limits: { spells: { from_s: number }[]; kept: boolean }[];
    };
    expect(summary.limits[0].kept).toBe(false);
    expect(summary.limits[0].spells[0].from_s).toBe(result.limits[0].spells[0].from);
  });
});
