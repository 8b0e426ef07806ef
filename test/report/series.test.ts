import { mkdtempSync, readFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import Papa from 'papaparse';
import { describe, expect, it } from 'vitest';
import { GrowingFile } from '../../src/cli/files.ts';
import { seriesColumns, seriesLines } from '../../src/report/series.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run, usual } from '../../src/study/run.ts';
import { fromText, scenario } from '../support/plants.ts';

/** What a run writes as it goes. */
function csv(s: Scenario): { text: string; result: ReturnType<typeof run> } {
  const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
  const result = run(s, {
    ...usual,
    rows: (plant, derived) => {
      const lines = seriesLines(plant, derived);
      const file = new GrowingFile(folder, 'series.csv');
      file.add(lines.header);
      return { row: (t, y) => file.add(lines.line(t, y)), end: () => file.close() };
    },
  });
  return { text: readFileSync(join(folder, 'series.csv'), 'utf8'), result };
}

describe('series.csv', () => {
  it('reads back in full double precision with a general-purpose CSV reader (RFC 4180)', () => {
    const { text, result } = csv(scenario('wattle-acid-ratio'));
    const parsed = Papa.parse<string[]>(text.trimEnd());
    expect(parsed.errors).toEqual([]);
    const [header, ...rows] = parsed.data;
    expect(header[0]).toBe('time [h]');
    expect(header[1]).toBe('raffinate.flow [m^3/h]');
    expect(rows).toHaveLength(result.records.times.length);
    const columns = seriesColumns(result.plant);
    rows.forEach((row, k) => {
      expect(Number(row[0])).toBe(result.records.times[k] / 3600);
      columns.forEach((c, i) => {
        expect(Number(row[i + 1])).toBe(result.records.rows[k][c.output] * c.factor);
      });
    });
  });

  it('names outlets and tanks first, then vessels by train, stage, unit, phase and solute', () => {
    const headers = seriesColumns(run(scenario('saltbush-copper')).plant).map((c) => c.header);
    expect(headers.slice(0, 3)).toEqual([
      'raffinate.flow [m^3/h]',
      'raffinate.copper [g/L]',
      'raffinate.acid [g/L]',
    ]);
    expect(headers).toContain('organic tank.volume [m^3]');
    expect(headers).toContain('extraction.2.settler.organic.copper [g/L]');
    expect(headers.indexOf('extraction.1.mixer.aqueous.copper [g/L]')).toBeGreaterThan(
      headers.indexOf('organic tank.copper [g/L]'),
    );
    expect(new Set(headers).size).toBe(headers.length);
  });

  it('holds every record of a long run, of which only so many are kept, evenly spread', () => {
    const s = { ...scenario('wattle-acid-ratio'), recordEvery: 0.25 };
    const times: number[] = [];
    let ended = 0;
    const { records, plant } = run(s, {
      ...usual,
      rows: () => ({ row: (t) => times.push(t), end: () => ended++ }),
    });
    const all = Math.floor(s.horizon / 0.25) + 1;
    const most = 4e6 / plant.system.outputs.length;
    expect(all).toBeGreaterThan(most);
    expect([times.length, records.made, ended]).toEqual([all, all, 1]);
    expect(records.rows.length).toBe(records.times.length);
    expect(records.rows.length).toBeLessThanOrEqual(most + 1);
    expect(records.rows.length).toBeGreaterThan(most / 2 - 2);
    const gaps = records.times.slice(1, -1).map((t, k) => t - records.times[k]);
    expect(new Set(gaps.map((g) => g.toFixed(6))).size).toBe(1);
    expect([records.times[0], records.times.at(-1)]).toEqual([0, s.horizon]);
    const few = run({ ...s, recordEvery: gaps[0] }).records;
    const k = Math.floor(few.times.length / 2);
    expect(records.times[k]).toBe(few.times[k]);
    expect(records.rows[k]).toEqual(few.rows[k]);
  });

  it('quotes a name with a quote in it', () => {
    const s = fromText(
      `title: quoted\nsolutes: ["a'b;c"]\nfeeds:\n  f: {phase: aqueous, flow: 1 m^3/h, "a'b;c": 1 g/L}\n` +
        `  s: {phase: organic, flow: 1 m^3/h}\ntrains:\n  t: {stages: 1, aqueous: f -> r, organic: s -> e, mixer: {volume: 0.1 m^3, ka: 0.1 1/s},` +
        ` settler: {aqueous_volume: 1 m^3, organic_volume: 1 m^3}, equilibrium: {"a'b;c": {law: ratio, ratio: 2}}}\nhorizon: 10 min\nrecord_every: 5 min\n`,
    );
    const { text } = csv(s);
    expect(text.split('\r\n')).toHaveLength(1 + 3 + 1);
    expect(Papa.parse<string[]>(text.trimEnd()).data[0]).toContain("r.a'b;c [g/L]");
  });
});
