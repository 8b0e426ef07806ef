import { readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inRepo } from './support/plants.ts';

/** Rooms of `src` and what each may import; types of a result or of the System are named apart. */
const allowed: Record<string, { readonly any: readonly string[]; readonly types: readonly string[] }> = {
  math: { any: [], types: [] },
  solve: { any: ['math'], types: [] },
  scenario: { any: [], types: [] },
  plant: { any: ['math', 'scenario'], types: ['solve'] },
  control: { any: ['math'], types: ['solve'] },
  study: { any: ['math', 'scenario', 'plant', 'solve', 'control'], types: [] },
  report: { any: [], types: ['study', 'plant', 'scenario', 'solve', 'control'] },
  library: { any: ['study', 'scenario', 'solve'], types: ['plant'] },
  cli: { any: ['study', 'report', 'scenario', 'plant', 'solve'], types: [] },
};

/** Facts that a report needs in words or in numbers without computing: explained here, one by one. */
const exceptions = new Set([
  // The stop of a run in one sentence.
  'report/summary.ts > solve/outcome.ts',
  'report/screen.ts > solve/outcome.ts',
  // Flows and hold-ups as the plant itself states them.
  'report/plant-facts.ts > plant/facts.ts',
  'report/check-screen.ts > plant/facts.ts',
  // The rows of a plant at rest, for its linearisation.
  'control/linearise.ts > solve/steady.ts',
]);

const src = inRepo('src');

function files(folder: string): string[] {
  return readdirSync(folder).flatMap((name) => {
    const path = join(folder, name);
    return statSync(path).isDirectory()
      ? files(path)
      : path.endsWith('.ts') && !path.endsWith('.d.ts')
        ? [path]
        : [];
  });
}

interface Import {
  readonly from: string;
  readonly to: string;
  readonly typeOnly: boolean;
}

function imports(path: string): Import[] {
  const text = readFileSync(path, 'utf8');
  const pattern = /(?:import|export)\s+(type\s+)?([^'"]*?)from\s+'(\.[^']+)'|import\('(\.[^']+)'\)/g;
  return [...text.matchAll(pattern)].map((m) => {
    return {
      from: relative(src, path),
      to: relative(src, resolve(dirname(path), m[3] ?? m[4])),
      typeOnly: m[1] !== undefined,
    };
  });
}

const room = (path: string): string => path.split('/')[0];

describe('architecture', () => {
  const all = files(src);

  it('imports run one way', () => {
    const wrong = all.flatMap(imports).filter(({ from, to, typeOnly }) => {
      const rules = allowed[room(from)];
      if (!rules) return true;
      if (room(from) === room(to) || rules.any.includes(room(to))) return false;
      if (typeOnly && rules.types.includes(room(to))) return false;
      return !exceptions.has(`${from} > ${to}`);
    });
    expect(wrong.map((i) => `${i.from} > ${i.to}${i.typeOnly ? ' (types)' : ''}`)).toEqual([]);
  });

  it('every exception is still needed', () => {
    const used = new Set(all.flatMap(imports).map((i) => `${i.from} > ${i.to}`));
    expect([...exceptions].filter((e) => !used.has(e))).toEqual([]);
  });

  it('the rooms are the ones of the plan, and DEVELOPERS.md names each', () => {
    const rooms = readdirSync(src).filter((n) => n !== 'build');
    expect(rooms.sort()).toEqual(Object.keys(allowed).sort());
    const guide = readFileSync(inRepo('DEVELOPERS.md'), 'utf8');
    for (const r of rooms) expect(guide).toContain(`${r}/`);
  });

  it('no file is long, and most are short', () => {
    const lengths = all.map((f) => [readFileSync(f, 'utf8').split('\n').length, relative(src, f)] as const);
    expect(lengths.filter(([n]) => n > 400)).toEqual([]);
    const sorted = lengths.map(([n]) => n).sort((a, b) => a - b);
    expect(sorted[Math.floor(sorted.length / 2)]).toBeLessThanOrEqual(100);
  });

  it('reports compute nothing: they import no integrator and no physics', () => {
    const bad = all
      .flatMap(imports)
      .filter((i) => room(i.from) === 'report' && /^(math|solve\/(integrate|rosenbrock|steady))/.test(i.to));
    expect(bad).toEqual([]);
  });
});
