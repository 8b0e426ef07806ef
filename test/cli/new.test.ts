import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { PassThrough } from 'node:stream';
import { afterAll, describe, expect, it } from 'vitest';
import { exits, Known } from '../../src/cli/exit.ts';
import { type Asking, makeNew, type NewOptions } from '../../src/cli/verbs/new.ts';
import { checkScreen } from '../../src/report/check-screen.ts';
import { starters } from '../../src/scenario/starters/index.ts';
import { check } from '../../src/study/check/check.ts';
import { run } from '../../src/study/run.ts';
import { fromText, inRepo } from '../support/plants.ts';

const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
const at = (name: string): string => join(folder, name);
afterAll(() => rmSync(folder, { recursive: true }));

const silent = { say: () => undefined, progress: () => undefined, clear: () => undefined };

/** A pipe, or a terminal at which these lines are typed. */
function typed(...lines: readonly string[]): Asking & { said: () => string } {
  const input = Object.assign(new PassThrough(), { isTTY: lines.length > 0 });
  const output = Object.assign(new PassThrough(), { isTTY: lines.length > 0 });
  const left = [...lines];
  let said = '';
  output.on('data', (piece) => {
    said += piece;
    // One answer for each question.
    if (!String(piece).endsWith(']: ')) return;
    const next = left.shift();
    if (next === undefined) input.end();
    else input.write(`${next}\n`);
  });
  return { input, output, said: () => said };
}

const make = (name: string, options: NewOptions, terminal: Asking = typed()): Promise<number> =>
  makeNew(at(name), options, silent, terminal);
const refusal = (name: string, options: NewOptions, terminal?: Asking): Promise<Known> =>
  make(name, options, terminal).then(
    () => {
      throw new Error('not refused');
    },
    (e) => {
      expect(e).toBeInstanceOf(Known);
      return e;
    },
  );

describe('a new scenario', () => {
  it.each(starters.map((s) => s.name))('%s passes check without a remark, and runs', async (kind) => {
    expect(await make(`${kind}.yaml`, { kind })).toBe(exits.done);
    const text = readFileSync(at(`${kind}.yaml`), 'utf8');
    expect(text.split('\n').filter((l) => l.includes('#')).length).toBeGreaterThanOrEqual(3);
    const s = fromText(text);
    const looked = check(s);
    expect(looked.restless).toBeNull();
    expect(checkScreen(looked).join('\n')).not.toContain('Worth a look');
    const r = run(s);
    expect(r.complete).toBe(true);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-9);
    // What it is to show happens: its upsets move the outlet that its limit is on.
    expect(r.limits.length).toBeGreaterThan(0);
  });

  it('carries the names it is given, whatever is in them', async () => {
    await make('own.yaml', { kind: 'parting', title: 'Kiln: "two" # metals', solutes: 'nickel ore, yes' });
    const s = fromText(readFileSync(at('own.yaml'), 'utf8'));
    expect(s.title).toBe('Kiln: "two" # metals');
    expect(s.solutes).toEqual(['nickel ore', 'yes']);
    expect(run(s).complete).toBe(true);
  });

  it('never overwrites a file unless it is told to', async () => {
    writeFileSync(at('mine.yaml'), 'mine\n');
    const e = await refusal('mine.yaml', { kind: 'single' });
    expect(e.code).toBe(exits.usage);
    expect(e.message).toMatch(/mine\.yaml is there already; choose another name, or write --replace$/);
    expect(readFileSync(at('mine.yaml'), 'utf8')).toBe('mine\n');
    expect(await make('mine.yaml', { kind: 'single', replace: true })).toBe(exits.done);
    expect(readFileSync(at('mine.yaml'), 'utf8')).toContain('solutes: [acid]');
  });

  it.each([
    [{ kind: 'circus' }, /unknown kind 'circus'; did you mean 'circuit'\?; the kinds are single, circuit, /],
    [{ kind: '7' }, /unknown kind '7'.*single, circuit, parting, loop, vessels, beaker/],
    [{}, /which kind of plant\? Write --kind and one of:\n {2}1 {2}single/],
    [
      { kind: 'parting', solutes: 'zinc' },
      /parting has 2; write as many, such as --solutes product,impurity/,
    ],
    [{ kind: 'single', solutes: 'a,b' }, /single has 1; write one name, such as --solutes acid/],
    [{ kind: 'single', solutes: 'c.d' }, /^--solutes: /],
    [{ kind: 'circuit', solutes: 'acid' }, /^--solutes: /],
    [{ kind: 'single', title: ' ' }, /^--title: must not be empty/],
  ] as const)('%o is refused, and nothing is written', async (options, message) => {
    const before = readdirSync(folder);
    const e = await refusal('refused.yaml', options);
    expect(e.code).toBe(exits.usage);
    expect(e.message).toMatch(message);
    expect(readdirSync(folder)).toEqual(before);
  });

  it('a folder that is not there, and one that is no file, are told with what to do', async () => {
    expect((await refusal('no/such.yaml', { kind: 'single' })).message).toMatch(
      /there is no folder .*no; make it/,
    );
    expect((await refusal('.', { kind: 'single' })).message).toMatch(/is a folder; name a file in it/);
  });

  it('asks on a terminal for what the options leave open, and takes what is there for an empty answer', async () => {
    const terminal = typed('2', 'Our plant', '');
    expect(await make('asked.yaml', {}, terminal)).toBe(exits.done);
    expect(terminal.said()).toContain('2  circuit');
    const s = fromText(readFileSync(at('asked.yaml'), 'utf8'));
    expect([s.title, s.solutes, s.trains.length]).toEqual(['Our plant', ['metal'], 2]);
  });

  it('takes answers that are pasted all at once', async () => {
    const terminal = typed();
    Object.assign(terminal.input, { isTTY: true });
    Object.assign(terminal.output, { isTTY: true });
    (terminal.input as PassThrough).end('parting\nPasted\nzinc, iron\n');
    expect(await make('pasted.yaml', {}, terminal)).toBe(exits.done);
    expect(fromText(readFileSync(at('pasted.yaml'), 'utf8')).solutes).toEqual(['zinc', 'iron']);
  });

  it('an end of the answers writes nothing', async () => {
    const e = await refusal('left.yaml', {}, typed('single'));
    expect(e.code).toBe(exits.interrupted);
    expect(readdirSync(folder)).not.toContain('left.yaml');
  });

  it('with --editor its schema lies beside it', async () => {
    await make('edited.yaml', { kind: 'single', editor: true });
    expect(readFileSync(at('edited.yaml'), 'utf8')).toMatch(
      /^# yaml-language-server: \$schema=\.\/scenario\.schema\.json\n/,
    );
    expect(readFileSync(at('scenario.schema.json'), 'utf8')).toBe(
      readFileSync(inRepo('scenarios/scenario.schema.json'), 'utf8'),
    );
  });
});

it('help names the kinds that there are', async () => {
  const text = readFileSync(inRepo('src/cli/program.ts'), 'utf8');
  expect(text).toContain(`kind of plant: ${starters.map((s) => s.name).join(', ')};`);
});
