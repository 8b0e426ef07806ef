import { execFileSync } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inRepo } from '../support/plants.ts';

const about = JSON.parse(readFileSync(inRepo('package.json'), 'utf8'));
const text = (path: string): string => readFileSync(inRepo(path), 'utf8');

/** Everything that a built file loads before its first line runs. */
function loaded(file: string, seen = new Set<string>()): Set<string> {
  if (seen.has(file)) return seen;
  seen.add(file);
  const code = readFileSync(file, 'utf8');
  for (const [, from] of code.matchAll(
    /^(?:import|export)\b[^;]*?from\s*["']([^"']+)["']|^import\s*["']([^"']+)["']/gm,
  ))
    if (from?.startsWith('.')) loaded(join(dirname(file), from), seen);
    else if (from && !from.startsWith('node:')) seen.add(from);
  return seen;
}

describe('the built library', () => {
  it('loads no pictures and no units engine before they are needed', () => {
    const files = [...loaded(inRepo('dist/index.js'))];
    expect(files.length).toBeGreaterThan(2);
    expect(files.filter((f) => /pictures|screen|chart|canvas|mathjs|commander/.test(f))).toEqual([]);
    const run = `const before = process.memoryUsage; await import(${JSON.stringify(inRepo('dist/index.js'))});
      const { createRequire } = await import('node:module');
      console.log(Object.keys(createRequire(import.meta.url).cache).filter((k) => /mathjs|chart|canvas/.test(k)).length);`;
    expect(
      execFileSync(process.execPath, ['--input-type=module', '-e', run], { encoding: 'utf8' }).trim(),
    ).toBe('0');
  });

  it('has types that lean on nothing that is not in the package', () => {
    const [first, ...more] = [about.exports['.'].types.replace('./', '')];
    const queue = [first, ...more];
    const seen = new Set<string>();
    while (queue.length > 0) {
      const path = queue.pop() as string;
      if (seen.has(path)) continue;
      seen.add(path);
      for (const [, from] of text(path).matchAll(/from '([^']+)'/g)) {
        expect(from, path).toMatch(/^\.\/[\w-]+\.ts$/);
        queue.push(join(dirname(path), from.replace('.ts', '.d.ts')));
      }
    }
    expect(seen.size).toBeGreaterThan(3);
  });

  it('is what the sweep of the scenarios imports, in two dozen lines', () => {
    expect(text('scenarios/sweep.mjs').split('\n').length).toBeLessThan(25);
    const out = execFileSync(process.execPath, [inRepo('scenarios/sweep.mjs')], { encoding: 'utf8' });
    const rows = out.trim().split('\n');
    expect(rows).toHaveLength(6);
    // The upset of README: three stages, 430 m³/h.
    expect(rows[4]).toBe('3 stages, 430 m^3/h: 0.234 g/L, 0.720 at worst, 2.81 h above the limit');
    const worst = rows.map((r) => Number(/([\d.]+) at worst/.exec(r)?.[1]));
    expect([...worst].sort((a, b) => b - a)).toEqual(worst);
  });
});

describe('the package', () => {
  it('holds what is needed, and nothing else', () => {
    const [pack] = JSON.parse(
      execFileSync('npm', ['pack', '--dry-run', '--json', '--ignore-scripts'], {
        cwd: inRepo('.'),
        encoding: 'utf8',
        stdio: ['ignore', 'pipe', 'ignore'],
      }),
    );
    const files: string[] = pack.files.map((f: { path: string }) => f.path);
    const own = files.filter((f) => !f.startsWith('node_modules/'));
    for (const f of [
      'package.json',
      'README.md',
      'LICENSE',
      'dist/upsettle.js',
      'dist/index.js',
      'dist/library/index.d.ts',
      'dist/ensemble-worker.js',
      'dist/map-worker.js',
      'src/report/canvas/index.js',
      'scenarios/saltbush-copper.yaml',
      'scenarios/scenario.schema.json',
      'scenarios/wattle-isotherm.csv',
      'node_modules/canvas/index.js',
      'node_modules/chart.js/package.json',
      'node_modules/chartjs-node-canvas/package.json',
    ])
      expect(files).toContain(f);
    const known =
      /^(package\.json|README\.md|LICENSE|dist\/[\w-]+\.js|dist\/parts\/[\w-]+\.js|dist\/library\/[\w-]+\.d\.ts|scenarios\/[\w.-]+\.(yaml|csv|json|mjs)|src\/report\/canvas\/(index\.js|package\.json))$/;
    expect(own.filter((f) => !known.test(f))).toEqual([]);
    // The prebuilt canvas comes from the registry, for the machine at hand: bundled it would be of this one.
    expect(files.filter((f) => /\.node$|@napi-rs/.test(f))).toEqual([]);
    expect(pack.size).toBeLessThan(3e6);
  });

  it('uses nothing that may not be passed on, and lists it', () => {
    const out = execFileSync(process.execPath, [inRepo('src/build/licences.mjs')], { encoding: 'utf8' });
    for (const name of Object.keys(about.dependencies).filter((n) => n !== 'canvas'))
      expect(out).toMatch(new RegExp(`^${name.replace('/', '\\/')} +[\\d.]+ +used +\\S`, 'm'));
    expect(out).toMatch(/all of those in use free to pass on\n$/);
  });

  it('pins its versions, and every script and export is there', () => {
    for (const [name, version] of Object.entries<string>({ ...about.dependencies, ...about.devDependencies }))
      expect(version, name).toMatch(name === 'canvas' ? /^file:/ : /^\d+\.\d+\.\d+$/);
    for (const to of [
      about.bin.upsettle,
      about.exports['.'].default,
      about.exports['./scenario.schema.json'],
    ])
      expect(existsSync(inRepo(to)), to).toBe(true);
  });
});
