import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, describe, expect, it, vi } from 'vitest';
import { exits } from '../../src/cli/exit.ts';
import { main } from '../../src/cli/program.ts';
import { inRepo } from '../support/plants.ts';

const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
const sound = inRepo('scenarios/ten.yaml');
const inFolder = (name: string): string => join(folder, name);
writeFileSync(inFolder('a file'), 'a\n');
afterAll(() => rmSync(folder, { recursive: true }));
afterEach(() => {
  vi.restoreAllMocks();
});

/** The command in this process: exit code and what went to the screen. */
async function upsettle(...args: readonly string[]): Promise<{ code: number; out: string; error: string }> {
  const said = { out: '', error: '' };
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    said.out += text;
    return true;
  });
  vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    said.error += text;
    return true;
  });
  const code = await main(['node', 'upsettle', ...args]);
  vi.restoreAllMocks();
  return { code, ...said };
}

describe('wrong usage is exit 2 with a short message', () => {
  const cases: readonly (readonly [args: readonly string[], message: RegExp])[] = [
    [['rnu', sound], /unknown command 'rnu'\s+\(Did you mean run\?\)/],
    [['Run', sound], /unknown command 'Run'\s+\(Did you mean run\?\)/],
    [['run'], /missing required argument 'file'/],
    [['check', sound, sound], /too many arguments for 'check'/],
    [['run', ''], /the name of the scenario file is empty/],
    [['run', sound, '--fast'], /unknown option '--fast'/],
    [['--fast', 'run', sound], /unknown option '--fast'/],
    [['check', sound, '--out', 'x'], /unknown option '--out'/],
    [['run', sound, '--out'], /option '--out <dir>' argument missing/],
    [
      ['run', sound, '--integrator', 'euler'],
      /'euler' is invalid\. Allowed choices are rodas5p, rodas4, odex/,
    ],
    ...['-1', '1.5', 'many', '1e9'].map(
      (text) =>
        [
          ['commission', sound, `--ensemble=${text}`],
          /'--ensemble <runs>' argument '.*' is invalid\. Expected a whole number from 0 to 100000/,
        ] as const,
    ),
    [['commission', sound, '--workers', '0'], /Expected a whole number from 1 to 256/],
    [['rehearse', sound, '--grid', '20'], /Expected two whole numbers from 2 to 200, such as 20x16/],
    [['rehearse', sound, '--map-of', 'all'], /'all' is invalid\. Allowed choices are worst, time/],
    [['rehearse', sound, '--speed', '0'], /Expected a whole number from 1 to 100000/],
    [['rehearse', sound, '--map', 'nobody'], /--map: no answer 'nobody'/],
    [['run', sound, '--scale', '3'], /'3' is invalid\. Allowed choices are 1, 2/],
    ...['0.5', '0', '-1e-6', '1e-13', '1e400', 'NaN', 'small', '', '1e-6x', '1,0e-6'].map(
      (text) =>
        [
          ['run', sound, '--tolerance', text],
          /'--tolerance <number>' argument '.*' is invalid\. Expected a number from 1e-12 to 1e-2/,
        ] as const,
    ),
    [['run', sound, '--out', inFolder('a file')], /cannot make the folder .*: .*a file is a file/],
    [['steady', sound, '--out', inFolder('a file/b/c')], /cannot make the folder .*: .*a file is a file/],
  ];
  it.each(cases.map(([args, message]) => ({ args, message })))('$args', async ({ args, message }) => {
    const { code, out, error } = await upsettle(...args);
    expect(code).toBe(exits.usage);
    expect(out).toBe('');
    expect(error).toMatch(message);
    expect(error).not.toMatch(/^\s+at /m);
    expect(error.trimEnd().split('\n').length).toBeLessThanOrEqual(3);
    expect(readdirSync(folder)).toEqual(['a file']);
  });
});

describe('what is no scenario is exit 1', () => {
  it.each([
    [inFolder('nope.yaml'), 'nope.yaml:1:1 there is no such file'],
    [folder, ':1:1 is not a file'],
    [inFolder('a file'), ":1:1 expected settings by name (title: …), got 'a'"],
    [inFolder('a file/x.yaml'), 'x.yaml:1:1 cannot be read (ENOTDIR)'],
  ])('%s', async (file, words) => {
    const { code, out, error } = await upsettle('check', file);
    expect({ code, out }).toEqual({ code: exits.refused, out: '' });
    expect(error).toBe(`${error.trimEnd()}\n`);
    expect(error).toContain(words);
    expect(error.startsWith(file)).toBe(true);
  });
});

describe('help', () => {
  it('has an example for every verb', async () => {
    const { out } = await upsettle('--help');
    const verbs = [...out.matchAll(/^ {2}(\w+) (?:\[options\]|<file>)/gm)].map((m) => m[1]);
    expect(verbs).toEqual(expect.arrayContaining(['new', 'check', 'run', 'steady', 'tune']));
    for (const verb of [...verbs, 'schema'].filter((v) => v !== 'help')) {
      const help = await upsettle(verb, '--help');
      expect(help.out, verb).toMatch(new RegExp(`Examples?:\\n {2}upsettle ${verb}\\b`));
    }
  });
});

describe('questions about the command itself', () => {
  it('are answered on the screen', async () => {
    expect(await upsettle('--version')).toEqual({
      code: exits.done,
      out: expect.stringMatching(/^\d+\.\d+\.\d+\n$/),
      error: '',
    });
    const help = await upsettle('run', '--help');
    expect(help).toMatchObject({ code: exits.done, error: '' });
    for (const option of ['--out', '--no-pictures', '--scale', '--integrator', '--tolerance', '--quiet'])
      expect(help.out).toContain(option);
    const schema = await upsettle('schema');
    expect(schema).toMatchObject({ code: exits.done, error: '' });
    expect(JSON.parse(schema.out)).toMatchObject({ title: 'Upsettle scenario', type: 'object' });
    const greeting = await upsettle();
    expect(greeting).toMatchObject({ code: exits.done, error: '' });
    for (const verb of ['new', 'check', 'run'])
      expect(greeting.out).toContain(`  upsettle ${verb} my-plant.yaml `);
    for (const verb of ['steady', 'commission', 'rehearse', 'tune']) expect(greeting.out).toContain(verb);
  });
});
