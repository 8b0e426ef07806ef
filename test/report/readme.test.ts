import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { checkScreen } from '../../src/report/check-screen.ts';
import { starterNamed, starters } from '../../src/scenario/starters/index.ts';
import { check } from '../../src/study/check/check.ts';
import { fromText, inRepo } from '../support/plants.ts';

const readme = readFileSync(inRepo('README.md'), 'utf8');
const scenarios = readdirSync(inRepo('scenarios')).filter((n) => n.endsWith('.yaml'));

describe('README', () => {
  it('every picture and file that it points at is there', () => {
    const links = [...readme.matchAll(/\]\(([^)#]+)\)/g)]
      .map((m) => m[1])
      .filter((l) => !l.startsWith('http'));
    expect(links.length).toBeGreaterThan(20);
    expect(links.filter((l) => !existsSync(inRepo(l)))).toEqual([]);
  });

  it('lists all scenarios in the order that their heads state', () => {
    const listed = [...readme.matchAll(/^\| (\d+) \| \[`([\w-]+\.yaml)`\]/gm)].map((m) => ({
      at: m[1],
      file: m[2],
    }));
    expect(listed.map((q) => q.file).sort()).toEqual([...scenarios].sort());
    for (const [i, { at, file }] of listed.entries()) {
      const head = readFileSync(inRepo(`scenarios/${file}`), 'utf8').split('\n')[1];
      expect(head, file).toMatch(new RegExp(`^# ${i + 1} of ${scenarios.length}, to learn: .{20,}\\.$`));
      expect(Number(at)).toBe(i + 1);
    }
  });

  it('lists the kinds of plants that new knows', () => {
    for (const { name } of starters) expect(readme).toContain(`| \`${name}\` | `);
  });

  it('shows of the first plant what check prints of it', () => {
    const text = starterNamed('circuit')!.text({ title: 'First plant', solutes: ['copper'] });
    const screen = checkScreen(check(fromText(text)));
    const block = readme.split('prints trains, streams')[1].split('```')[1];
    const lines = block.split('\n').filter((l) => l !== '');
    expect(lines.length).toBeGreaterThan(8);
    for (const line of lines) expect(screen).toContain(line);
  });
});
