import { spawn, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { exits } from '../../src/cli/exit.ts';
import { inRepo } from '../support/plants.ts';

const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
const program = inRepo('dist/upsettle.js');
const sound = readFileSync(inRepo('scenarios/ten.yaml'), 'utf8');

interface Answer {
  readonly code: number | null;
  readonly out: string;
  readonly error: string;
}

function upsettle(...args: readonly string[]): Answer {
  const done = spawnSync(process.execPath, [program, ...args], {
    cwd: folder,
    encoding: 'utf8',
  });
  return { code: done.status, out: done.stdout, error: done.stderr };
}

beforeAll(() => {
  writeFileSync(join(folder, 'sound.yaml'), sound);
  writeFileSync(
    join(folder, 'wrong.yaml'),
    sound.replace('0.2 m^3/s', '0.2 m^3/t').replace('at: 6 h', 'at: 60 h'),
  );
  writeFileSync(join(folder, 'data.csv'), 'a\n');
});
afterAll(() => rmSync(folder, { recursive: true }));

const files = (): string[] => readdirSync(folder).sort();

describe('the command', () => {
  it('a scenario that is refused: every complaint with its place, no stack, nothing written', () => {
    const before = files();
    const { code, out, error } = upsettle('run', 'wrong.yaml', '--out', 'results');
    expect({ code, out }).toEqual({ code: exits.refused, out: '' });
    expect(error.trimEnd().split('\n')).toEqual([
      expect.stringMatching(/^wrong\.yaml:\d+:\d+ feeds\.feed\.flow: expected a flow by volume/),
      expect.stringMatching(
        /^wrong\.yaml:\d+:\d+ upsets\.0\.at: begins at 60 h, but the run ends at 24 h; begin earlier or lengthen the horizon$/,
      ),
    ]);
    expect(files()).toEqual(before);
  });

  it('a state kept on the way starts the next run where the first one was', () => {
    const kept = upsettle(
      'run',
      'sound.yaml',
      '--no-pictures',
      '--quiet',
      '--out',
      'first',
      '--save-state',
      'at-3h.json',
      '--save-at',
      '3 h',
    );
    expect(kept.code).toBe(exits.done);
    const next = sound.replace(/^start:.*$/m, '').replace('at: 6 h', 'at: 3 h');
    writeFileSync(join(folder, 'next.yaml'), `${next}\nstart: {saved: at-3h.json}\n`);
    expect(upsettle('run', 'next.yaml', '--no-pictures', '--quiet', '--out', 'second').code).toBe(exits.done);
    writeFileSync(
      join(folder, 'other.yaml'),
      `${next.replace('stages: 10', 'stages: 9')}\nstart: {saved: at-3h.json}\n`,
    );
    const other = upsettle('check', 'other.yaml');
    expect(other.code).toBe(exits.refused);
    expect(other.error).toMatch(/start\.saved: the state in .*at-3h\.json is of another plant/);
    const rows = (of: string): number[][] =>
      readFileSync(join(folder, of, 'series.csv'), 'utf8')
        .trim()
        .split(/\r?\n/)
        .slice(1)
        .map((l) => l.split(',').map(Number));
    const first = rows('first').filter((row) => row[0] >= 3 - 1e-9);
    const second = rows('second');
    for (const k of [0, 5, first.length - 1])
      first[k].slice(1).forEach((v, i) => {
        expect(Math.abs(v - second[k][i + 1])).toBeLessThan(1e-4 * Math.max(1, Math.abs(v)));
      });
  });

  it('a scenario that is not there', () => {
    const { code, out, error } = upsettle('check', 'nope.yaml');
    expect({ code, out, error }).toEqual({
      code: exits.refused,
      out: '',
      error: 'nope.yaml:1:1 there is no such file; upsettle new nope.yaml writes one to begin with\n',
    });
  });

  it('wrong usage', () => {
    const before = files();
    const { code, out, error } = upsettle('run', 'sound.yaml', '--out', 'data.csv');
    expect({ code, out }).toEqual({ code: exits.usage, out: '' });
    expect(error).toMatch(/^cannot make the folder data\.csv: .*data\.csv is a file; write another --out\n$/);
    expect(files()).toEqual(before);
  });

  it('a run writes figures where it was told to, and says so', () => {
    const { code, out, error } = upsettle('run', 'sound.yaml', '--out', 'a/b', '--no-pictures');
    expect({ code, error }).toEqual({ code: exits.done, error: '' });
    expect(out).toMatch(/^RUN {2}Ten stages/);
    expect(out).toContain('Written to a/b: series.csv, summary.json');
    expect(readdirSync(join(folder, 'a/b')).sort()).toEqual(['series.csv', 'summary.json']);
  });

  it('a quiet one is quiet, and the default folder carries the names of scenario and verb', () => {
    const done = upsettle('steady', 'sound.yaml', '--no-pictures', '--quiet');
    expect(done).toEqual({ code: exits.done, out: '', error: '' });
    expect(existsSync(join(folder, 'out/sound/steady/summary.json'))).toBe(true);
  });

  it('an ensemble has the same figures on one worker thread and on two, and says nothing in a pipe', () => {
    const uncertain = 'uncertain: {extraction.mixer.ka: ±30 %, feed.solute: ±5 %}';
    writeFileSync(join(folder, 'unsure.yaml'), `${sound}${uncertain}\n`);
    const summaries = ['1', '2'].map((workers) => {
      const args = ['unsure.yaml', '--no-pictures', '--ensemble', '11', '--seed', '4', '--workers', workers];
      const { code, out, error } = upsettle('commission', ...args, '--out', `workers-${workers}`);
      expect({ code, error }).toEqual({ code: exits.done, error: '' });
      expect(out).toMatch(/How sure: at rest P10 .*\(11 runs, seed 4\)/);
      return JSON.parse(readFileSync(join(folder, `workers-${workers}/summary.json`), 'utf8'));
    });
    const [one, two] = summaries.map(({ solver: _, ...rest }) => rest);
    expect(one.ensemble).toMatchObject({ runs: 11, asked: 11, unsettled: 0, failed: 0 });
    expect(two).toEqual(one);
  });

  it('a commissioning of a scenario that is refused writes nothing', () => {
    const before = files();
    writeFileSync(join(folder, 'unsure-wrong.yaml'), `${sound}uncertain: {extraction.mixer.kaa: ±30 %}\n`);
    const { code, out, error } = upsettle('commission', 'unsure-wrong.yaml');
    expect({ code, out }).toEqual({ code: exits.refused, out: '' });
    expect(error).toMatch(
      /^unsure-wrong\.yaml:\d+:\d+ uncertain\.extraction\.mixer\.kaa: unknown input .*did you mean/,
    );
    rmSync(join(folder, 'unsure-wrong.yaml'));
    expect(files()).toEqual(before);
  });

  it('a map has the same figures on one worker thread and on two', () => {
    const answers = 'answers: {less: {start: 10 min after upset, moves: [{change: feed.flow, by: -10 %}]}}';
    writeFileSync(join(folder, 'answered.yaml'), `${sound}${answers}\n`);
    const maps = ['1', '2'].map((workers) => {
      const args = ['answered.yaml', '--no-pictures', '--map', 'less', '--grid', '5x3', '--workers', workers];
      const { code, out, error } = upsettle('rehearse', ...args, '--out', `map-${workers}`);
      expect({ code, error }).toEqual({ code: exits.done, error: '' });
      expect(out).toMatch(/^REHEARSAL/);
      return JSON.parse(readFileSync(join(folder, `map-${workers}/summary.json`), 'utf8')).map;
    });
    expect(maps[0].values).toHaveLength(3);
    expect(maps[1]).toEqual(maps[0]);
  });

  it('a rehearsal that is refused writes nothing, and one without an upset is refused', () => {
    const before = files();
    writeFileSync(join(folder, 'calm.yaml'), sound.replace(/upsets:\n(?: +.*\n)+/, ''));
    const { code, out, error } = upsettle('rehearse', 'calm.yaml');
    expect({ code, out }).toEqual({ code: exits.refused, out: '' });
    expect(error).toMatch(/^calm\.yaml:\d+:\d+ upsets: a rehearsal needs an upset/);
    rmSync(join(folder, 'calm.yaml'));
    expect(files()).toEqual(before);
  });

  it('a check writes nothing, and a reader that stops reading is no fault', async () => {
    const before = files();
    const child = spawn(process.execPath, [program, 'check', 'sound.yaml'], { cwd: folder });
    child.stdout.destroy();
    let error = '';
    child.stderr.on('data', (piece) => {
      error += piece;
    });
    const code = await new Promise((resolve) => {
      child.on('close', resolve);
    });
    expect({ code, error }).toEqual({ code: exits.done, error: '' });
    expect(files()).toEqual(before);
  });
});
