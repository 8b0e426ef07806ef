import { createWriteStream, mkdtempSync, readFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { finished } from 'node:stream/promises';
import Papa from 'papaparse';
import { describe, expect, it } from 'vitest';
import { seriesColumns, writeSeries } from '../../src/report/series.ts';
import { type RunSettings, run, usual } from '../../src/study/run.ts';
import { fromText, scenario } from '../support/plants.ts';

async function csv(result: ReturnType<typeof run>): Promise<string> {
  const path = join(mkdtempSync(join(tmpdir(), 'upsettle-')), 'series.csv');
  const to = createWriteStream(path);
  await writeSeries(result, to);
  to.end();
  await finished(to);
  return readFileSync(path, 'utf8');
}

describe('series.csv', () => {
  it('reads back in full double precision with a general-purpose CSV reader (RFC 4180)', async () => {
    const result = run(scenario('wattle-acid-ratio'));
    const parsed = Papa.parse<string[]>((await csv(result)).trimEnd());
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

  it('quotes a name with a quote in it', async () => {
    const s = fromText(
      `title: quoted\nsolutes: ["a'b;c"]\nfeeds:\n  f: {phase: aqueous, flow: 1 m^3/h, "a'b;c": 1 g/L}\n` +
        `  s: {phase: organic, flow: 1 m^3/h}\ntrains:\n  t: {stages: 1, aqueous: f -> r, organic: s -> e, mixer: {volume: 0.1 m^3, ka: 0.1 1/s},` +
        ` settler: {aqueous_volume: 1 m^3, organic_volume: 1 m^3}, equilibrium: {"a'b;c": {law: ratio, ratio: 2}}}\nhorizon: 10 min\nrecord_every: 5 min\n`,
    );
    const settings: RunSettings = usual;
    const text = await csv(run(s, settings));
    expect(text.split('\r\n')).toHaveLength(1 + 3 + 1);
    expect(Papa.parse<string[]>(text.trimEnd()).data[0]).toContain("r.a'b;c [g/L]");
  });
});
