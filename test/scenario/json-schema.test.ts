import { readdirSync, readFileSync } from 'node:fs';
import { Ajv2020, type ValidateFunction } from 'ajv/dist/2020.js';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { schemaText } from '../../src/cli/verbs/schema.ts';
import { editorSchemaName, modeline } from '../../src/scenario/editor.ts';
import { type Node, noteFor, scenarioJsonSchema } from '../../src/scenario/json-schema.ts';
import { settingNotes } from '../../src/scenario/setting-notes.ts';
import { starters } from '../../src/scenario/starters/index.ts';
import { inRepo } from '../support/plants.ts';

const schema = scenarioJsonSchema();
const valid: ValidateFunction = new Ajv2020({ allErrors: true, strictTypes: false }).compile(schema);
const complaints = (text: string): string[] =>
  valid(parse(text)) ? [] : (valid.errors ?? []).map((e) => `${e.instancePath} ${e.message}`);
const files = readdirSync(inRepo('scenarios')).filter((n) => n.endsWith('.yaml'));
const textOf = (name: string): string => readFileSync(inRepo(`scenarios/${name}`), 'utf8');

/** Every setting of the schema with the path of its name, and what is said of it. */
function settings(node: unknown, path: readonly string[] = []): { path: readonly string[]; node: Node }[] {
  if (typeof node !== 'object' || node === null) return [];
  const n = node as Record<string, unknown>;
  const named = Object.entries({
    ...(n.properties as object),
    ...(n.patternProperties ? { stage: Object.values(n.patternProperties)[0] } : {}),
  }).flatMap(([key, value]) => [
    { path: [...path, key], node: value as Node },
    ...settings(value, [...path, key]),
  ]);
  const inside = [n.additionalProperties, n.items, ...((n.anyOf ?? n.oneOf ?? []) as unknown[])];
  return [...named, ...inside.flatMap((v) => settings(v, path))];
}

describe('the JSON Schema of a scenario', () => {
  it('is of draft 2020-12, and the file beside the scenarios is what the verb prints', () => {
    expect(schema.$schema).toBe('https://json-schema.org/draft/2020-12/schema');
    expect(textOf(editorSchemaName)).toBe(schemaText());
  });

  it('every setting has a text, and no note is for nothing', () => {
    const all = settings(schema);
    expect(all.length).toBeGreaterThan(300);
    expect(all.filter((s) => !s.node.description).map((s) => s.path.join('.'))).toEqual([]);
    const used = new Set(all.map((s) => noteFor(s.path)));
    expect(Object.keys(settingNotes).filter((n) => !used.has(n))).toEqual([]);
    expect(JSON.stringify(schema)).not.toMatch(/component"|"stage 1":|"kinds"/);
  });

  it('what it says of defaults is what the reader does', () => {
    const of = (ending: string): unknown =>
      settings(schema).find((s) => s.path.join('.').endsWith(ending))?.node.default;
    expect(of('settler.tanks_in_series')).toBe(1);
    expect(of('mixer.continuity')).toBe('aqueous');
    expect(of('tanks.filled')).toBe('100 %');
    expect(of('trains.hydraulics')).toBe('full');
  });

  it.each(files)('%s keeps to it, and names it for editors', (name) => {
    expect(complaints(textOf(name))).toEqual([]);
    expect(textOf(name).startsWith(`${modeline(editorSchemaName)}\n`)).toBe(true);
  });

  it.each(starters.map((s) => s.name))('a new %s keeps to it', (name) => {
    const { text, solutes } = starters.find((s) => s.name === name)!;
    expect(complaints(text({ title: 'x', solutes }))).toEqual([]);
  });

  const wrong: readonly (readonly [what: string, from: RegExp, to: string, where: RegExp])[] = [
    ['an unknown key at the top', /^horizon:/m, 'horizn:', /must NOT have additional|required property/],
    ['a misspelt key among the content of a feed', /flow: 420/, 'flwo: 420', /\/feeds\/leach liquor/],
    [
      'an unknown key of a mixer',
      /stage_efficiency/,
      'stage_eficiency',
      /extraction\/mixer must NOT have add/,
    ],
    ['a figure without its unit', /420 m\^3\/h/, '420', /leach liquor\/flow must be string/],
    ['a figure without a number', /420 m\^3\/h/, 'much', /leach liquor\/flow must match pattern/],
    ['a word that is none of the known', /phase: aqueous/, 'phase: water', /phase must be equal to one of/],
    ['a list that is none', /solutes: \[copper\]/, 'solutes: copper', /\/solutes must be array/],
    ['a number that is none', /stages: 3/, 'stages: three', /stages must be integer/],
    ['a law that is unknown', /law: exchange/, 'law: barter', /equilibrium\/copper/],
    [
      'a setting that is missing',
      /, volume: 260 m\^3/,
      '',
      /organic tank must have required property 'volume'/,
    ],
  ];
  it.each(wrong)('%s is found', (_, from, to, where) => {
    const text = textOf('saltbush-copper.yaml');
    expect(text).toMatch(from);
    expect(complaints(text.replace(from, to)).join('\n')).toMatch(where);
  });
});
