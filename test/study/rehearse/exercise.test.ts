import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { Readable, Writable } from 'node:stream';
import { afterAll, describe, expect, it } from 'vitest';
import { step } from '../../../src/cli/verbs/step.ts';
import { readScenario } from '../../../src/scenario/read.ts';
import { typedMove, withExercise } from '../../../src/scenario/replay.ts';
import { rehearse } from '../../../src/study/rehearse/rehearse.ts';
import { inRepo } from '../../support/plants.ts';

const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
afterAll(() => rmSync(folder, { recursive: true }));

const file = inRepo('scenarios/saltbush-rehearsal.yaml');

/** An exercise with lines from a pipe: what was shown, what was said at the end, and the exit code. */
async function drive(
  lines: readonly string[],
  name: string,
): Promise<{ shown: string; said: string; code: number; out: string }> {
  let shown = '';
  const said: string[] = [];
  const output = new Writable({
    write(chunk, _, done) {
      shown += chunk;
      done();
    },
  });
  const out = join(folder, name);
  const console = { say: (l: readonly string[]) => said.push(...l), progress: () => {}, clear: () => {} };
  const input = Readable.from([`${lines.join('\n')}\n`]);
  const code = await step(file, { out, pictures: false, scale: '1', speed: 120 }, console, { input, output });
  return { shown, said: said.join('\n'), code, out };
}

describe('an exercise from a pipe', () => {
  const lines = [
    'wait 20 min',
    'organic tank.flow +10 %',
    '30 min',
    'leach liquor.flow to 380 m^3/h over 10 min for 2 h',
    '3 h',
    'end',
  ];

  it('is scored against nothing and the best named answer, and its file replays it exactly', async () => {
    const { said, code, out } = await drive(lines, 'one');
    expect(code).toBe(0);
    const summary = JSON.parse(readFileSync(join(out, 'summary.json'), 'utf8'));
    const own = summary.answers.find((a: { name: string }) => a.name === 'exercise');
    // The exercise begins ten minutes before the upset, which begins at 1 h.
    expect(own.steps[0].begins_s).toBe(3600 + 600);
    const path = join(out, 'exercise.yaml');
    const again = rehearse(
      readScenario(readFileSync(path, 'utf8'), { file: path, folder: dirname(path) }).scenario,
    );
    const replayed = again.answers.find((a) => a.answer.name === 'exercise');
    expect(replayed?.figures.limits[0].worst).toEqual({
      value: own.limits[0].worst,
      time: own.limits[0].worst_time_s,
    });
    expect(replayed?.figures.extraSolvent).toBe(own.extra_organic_m3);
    expect(said).toMatch(/SCORE {2}all limits kept/);
    for (const row of ['nothing', 'best named: less liquor on warning', 'yours']) expect(said).toContain(row);
    expect(said).toContain('You avoided 100 % of the copper above the limit');
  });

  it('shows what the replay gives at that time', async () => {
    const { shown, out } = await drive(lines.slice(0, -1), 'two');
    const path = join(out, 'exercise.yaml');
    const read = readScenario(readFileSync(path, 'utf8'), { file: path, folder: dirname(path) });
    const r = rehearse(read.scenario);
    const line = r.shown.limited.find((l) => l.answer === 'exercise');
    // 10 min before the upset, and 20 min, 30 min and 3 h of waiting.
    const at = 3600 - 600 + 1200 + 1800 + 3 * 3600;
    const k = r.shown.times.findIndex((t) => t >= at);
    const seen = Number(/upset \+ 3 h 40 min {2}raffinate\.copper (\S+) g\/L/.exec(shown)?.[1]);
    expect(Math.abs(seen - (line?.values[k] ?? 0))).toBeLessThan(2e-3);
  });

  it('refuses what it cannot do in the words of the scenario, and goes on', async () => {
    const { shown, code } = await drive(
      [
        'organic tnk.flow +10 %',
        'organic tank.flow +5',
        'organic tank.flow',
        'leach liquor.copper fast',
        'wait',
        'wait -1 h',
        'speed 0',
        'organic tank.flow +5 % for 1 min over 1 h',
      ],
      'three',
    );
    expect(code).toBe(0);
    for (const words of [
      "did you mean 'organic tank.flow'?",
      "write '+5 %' or give a unit",
      'what is to become of organic tank.flow?',
      "expected a concentration such as '5.2 g/L', got 'fast'",
      'wait how long?',
      'time goes forward only',
      'a speed is a number from 1 to 100000',
      'less than its ramp',
    ])
      expect(shown).toContain(words);
  });

  it('without a move there is nothing to score', async () => {
    const { said } = await drive(['14 h'], 'four');
    expect(said).toContain('No move was made');
  });
});

describe('typed moves', () => {
  const known = ['organic tank.flow', 'organic tank', 'extraction.2.mixer'];

  it('become the keys of a move', () => {
    expect(typedMove('organic tank.flow + 10 %', 60, known)).toEqual({
      time: 60,
      change: 'organic tank.flow',
      by: '+10 %',
    });
    expect(typedMove('organic tank.flow -10 m^3/h for 2 h over 5 min', 60, known)).toEqual({
      time: 60,
      change: 'organic tank.flow',
      by: '-10 m^3/h',
      over: '5 min',
      for: '2 h',
    });
    expect(typedMove('extraction.2.mixer stopped', 0, known)).toEqual({
      time: 0,
      change: 'extraction.2.mixer',
      to: 'stopped',
    });
  });

  it('stand in the scenario with its comments, and data files are found from the new folder', () => {
    const text =
      '# yaml-language-server: $schema=./scenario.schema.json\n# mine\nupsets:\n  - {at: 1 h, change: a.b, follow: {file: plant.csv, column: "x"}}\n';
    const made = withExercise(text, 'exercise', [{ time: 90, change: 'a.b', by: '+1 %' }], {
      from: '/plants/one',
      to: '/plants/out/x',
    });
    expect(made).toContain('# mine');
    expect(made).toMatch(/^# yaml-language-server: \$schema=\.\.\/\.\.\/one\/scenario\.schema\.json\n/);
    expect(made).toContain('file: ../../one/plant.csv');
    expect(made).toMatch(
      /answers:\n {2}exercise:\n {4}start: 90 s\n {4}moves:\n {6}- change: a\.b\n {8}by: \+1 %/,
    );
  });
});
