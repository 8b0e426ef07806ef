import { beforeAll, describe, expect, it } from 'vitest';
import { runPictures, runTable, steadyPictures } from '../../src/report/pictures/index.ts';
import { loopSignals } from '../../src/report/pictures/loop.ts';
import { operating } from '../../src/report/pictures/operating.ts';
import { outlets } from '../../src/report/pictures/outlets.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { scenario } from '../support/plants.ts';

let result: RunResult;
beforeAll(() => {
  result = run(scenario('saltbush-copper'));
});

/** Width and height from the header of a PNG (ISO/IEC 15948, IHDR). */
const size = (png: Buffer): [number, number] => [png.readUInt32BE(16), png.readUInt32BE(20)];

describe('pictures', () => {
  it('are PNG files of the size promised, and not blank', async () => {
    const names: string[] = [];
    for await (const p of runPictures(result)) {
      names.push(p.name);
      expect(p.png.subarray(1, 4).toString()).toBe('PNG');
      expect(size(p.png)).toEqual([1200, 700]);
      // A blank sheet of this size packs into less than 5 kB.
      expect(p.png.length).toBeGreaterThan(20_000);
    }
    expect(names).toEqual([
      'outlets.png',
      'profiles-extraction-copper.png',
      'map-extraction-copper.png',
      'operating-extraction-copper.png',
      'operating-strip-copper.png',
    ]);
  });

  it('come out at twice the pixels when asked', async () => {
    for await (const p of steadyPictures(steady(scenario('ten')), 2))
      expect(size(p.png)).toEqual([2400, 1400]);
  });

  it('show every limit, shade every upset in every field, and give every axis a title with its unit', () => {
    const config = outlets.config(result);
    const plugins = config.options?.plugins as unknown as {
      annotation: { annotations: Record<string, { type: string; yMin?: number }> };
    };
    const notes = Object.entries(plugins.annotation.annotations);
    const scales = config.options?.scales as Record<string, { title: { text: string[] } }>;
    const fields = Object.keys(scales).filter((k) => k.startsWith('y'));
    expect(notes.filter(([k]) => k.startsWith('limit')).map(([, v]) => v.yMin)).toEqual([0.6]);
    expect(notes.filter(([k]) => k.startsWith('shade'))).toHaveLength(2 * fields.length);
    for (const axis of Object.values(scales)) expect(axis.title.text.join(' ')).toMatch(/\[(h|g\/L|m³\/h)\]/);
  });

  it('draw the signals of each loop: measurement, set point, output between its limits, the flow that it sets', () => {
    const looped = run(scenario('saltbush-loop'));
    const parts = loopSignals.parts?.(looped) ?? [];
    expect(parts.map((p) => loopSignals.name(looped, p))).toEqual(['loop-aic-101.png']);
    const config = loopSignals.config(looped, parts[0]);
    expect(config.data.datasets.map((d) => d.label)).toEqual([
      'raffinate.copper',
      'as measured',
      'set point',
      'AIC-101 output',
      'lean organic.flow',
    ]);
    const end = (k: number): number => (config.data.datasets[k].data.at(-1) as { y: number }).y;
    // Without lag left, the flow is the ratio times the liquor: 420 m³/h.
    expect(end(4) / end(3)).toBeCloseTo(420, 3);
    expect(end(1)).toBe(looped.loops[0].measurementAtEnd);
    const notes = JSON.stringify(config.options?.plugins);
    for (const words of ['low 0.700', 'high 1.50', 'limit < 0.450 g/L']) expect(notes).toContain(words);
    expect(loopSignals.parts?.(result)).toEqual([]);
  });

  it('draw the very figures that the run found', () => {
    const config = outlets.config(result);
    const line = config.data.datasets.find((d) => d.label === 'raffinate.copper');
    const drawn = (line?.data ?? []) as { y: number }[];
    const highest = Math.max(...drawn.map((p) => p.y));
    expect(Math.abs(highest - result.limits[0].worst.value)).toBeLessThan(0.002);
  });

  it('put the mixers of an efficient plant close to its isotherm', () => {
    const d = result.diagrams.find((q) => q.train === 'extraction');
    const end = d?.moments.find((m) => m.label === 'end');
    const below = end?.stages.map((p) => {
      const right = end.isotherm.findIndex((q) => q.x >= p.x);
      const [a, b] = [end.isotherm[right - 1], end.isotherm[right]];
      return (a.y + ((b.y - a.y) * (p.x - a.x)) / (b.x - a.x) - p.y) / p.y;
    });
    for (const gap of below ?? [Number.NaN]) {
      expect(gap).toBeGreaterThan(0);
      expect(gap).toBeLessThan(0.12);
    }
    expect(operating.parts?.(result)).toHaveLength(2);
    expect(runTable).toHaveLength(6);
  });
});
