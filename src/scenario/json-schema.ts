import { z } from 'zod';
import { scenarioSchema } from './schema.ts';
import { settingNotes } from './setting-notes.ts';
import { type Kind, kinds } from './units.ts';

/** A node of a JSON Schema. */
export type Node = { [key: string]: unknown };

/** Stand for a user's own names; no scenario can use them, for names hold no `:`. */
const ANY_COMPONENT = ':component';
const ANY_STAGE = 'stage 1';

const NUMBER = String.raw`[+\-−]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?`;
const PLAIN = String.raw`^\s*${NUMBER}\s*$`;
const WITH_UNIT = String.raw`^\s*${NUMBER}(\s*[^\s\d.,]|\s+1\s*/).*$`;
/** Where any name may be a solute, only a concentration makes it one: a misspelt key is found by its figure. */
const CONTENT = String.raw`^\s*${NUMBER}\s*((k|m|u|µ|n)?(g|mol)\s*(/|\s*per\s*)\s*(dm\^?3|dm³|cm\^?3|cm³|m\^?3|m³|m?[Ll]|k?g)|m?M|wt ?%|%|ppm)\s*$`;

/**
 * The JSON Schema (draft 2020-12) of a scenario as people write it. It knows no names: what is dissolved may be any
 * key that has a concentration, and streams are not looked up. What settings say together is for `check`.
 */
export function scenarioJsonSchema(): Node {
  const schema = scenarioSchema({ solutes: [ANY_COMPONENT], species: [], stageKeys: [ANY_STAGE] });
  const raw = z.toJSONSchema(schema, { io: 'input' }) as Node;
  const { $schema, ...rest } = raw;
  return {
    $schema,
    title: 'Upsettle scenario',
    description: 'One plant of mixer-settlers and what happens to it. Every figure has its unit.',
    ...(mended(rest, []) as Node),
  };
}

/** A node with figures as people write them, open names in place of the stand-ins, and a text for every setting. */
function mended(node: unknown, path: readonly string[]): unknown {
  if (Array.isArray(node)) return node.map((n) => mended(n, path));
  if (typeof node !== 'object' || node === null) return node;
  const { kinds: figure, properties, propertyNames: _, ...plain } = node as Node;
  if (Array.isArray(figure)) return figureNode(node as Node, figure as Kind[]);
  const out: Node = {};
  for (const [key, value] of Object.entries(plain))
    out[key] = ['anyOf', 'oneOf', 'items', 'additionalProperties'].includes(key)
      ? mended(value, path)
      : value;
  if (typeof properties !== 'object' || properties === null) return out;
  const own: Node = {};
  for (const [key, value] of Object.entries(properties)) {
    if (key === ANY_COMPONENT)
      out.additionalProperties = {
        type: 'string',
        pattern: CONTENT,
        description: 'what is dissolved, by its name under solutes or species',
        examples: [kinds['a concentration'].example, kinds['a molar concentration'].example],
      };
    else if (key === ANY_STAGE)
      out.patternProperties = {
        '^stage [1-9][0-9]*$': noted(mended(value, [...path, 'stage']), [...path, 'stage']),
      };
    else own[key] = noted(mended(value, [...path, key]), [...path, key]);
  }
  return { ...out, properties: own };
}

/** A figure with its unit is a text; a plain number may be either. */
function figureNode({ description }: Node, allowed: readonly Kind[]): Node {
  const examples = allowed.map((kind) => kinds[kind].example);
  const kind = allowed.join(' or ');
  const own = typeof description === 'string' && !description.startsWith(allowed[0]) ? description : null;
  const said = own === null ? `${kind}, such as ${examples[0]}` : `${own} (${kind})`;
  return {
    ...(allowed.includes('a plain number')
      ? { anyOf: [{ type: 'number' }, { type: 'string', pattern: PLAIN }] }
      : { type: 'string', pattern: WITH_UNIT }),
    description: said,
    examples,
  };
}

/** Adds what the notes say of a setting: their text where it has none of its own, and what holds without it. */
function noted(node: unknown, path: readonly string[]): Node {
  const own = node as Node;
  const note = settingNotes[noteFor(path) ?? ''];
  if (!note) return own;
  const [what, left] = note;
  const said = typeof own.description === 'string' ? own.description : null;
  // A figure without words of its own says only what kind of figure it is.
  const bare = said !== null && /^an? [a-z ]+(?: or an? [a-z ]+)*, such as /.test(said);
  const description = said === null ? what : bare ? `${what}: ${said}` : said;
  return { ...own, description, ...(left === undefined ? {} : { default: left }) };
}

/** The note of a setting: the one with the longest ending of its path. */
export function noteFor(path: readonly string[]): string | null {
  for (let k = 0; k < path.length; k++) {
    const ending = path.slice(k).join('.');
    if (Object.hasOwn(settingNotes, ending)) return ending;
  }
  return null;
}
