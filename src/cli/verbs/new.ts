import { existsSync, statSync, writeFileSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import { createInterface, type Interface } from 'node:readline';
import type { Readable, Writable } from 'node:stream';
import { editorSchemaName, modeline } from '../../scenario/editor.ts';
import { hint } from '../../scenario/nearest.ts';
import { readScenario, ScenarioError } from '../../scenario/read.ts';
import { show } from '../../scenario/show.ts';
import { type Starter, starterNamed, starters } from '../../scenario/starters/index.ts';
import type { Console } from '../console.ts';
import { exits, Known } from '../exit.ts';
import { schemaText } from './schema.ts';

export interface NewOptions {
  readonly kind?: string;
  readonly title?: string;
  readonly solutes?: string;
  readonly replace?: boolean;
  readonly editor?: boolean;
}

/** Where questions go to and answers come from; they are only asked on a terminal. */
export interface Asking {
  readonly input: Readable & { readonly isTTY?: boolean };
  readonly output: Writable & { readonly isTTY?: boolean };
}

/** `upsettle new FILE`: a commented scenario to begin with. @throws Known where nothing can be written. */
export async function makeNew(
  file: string,
  options: NewOptions,
  console: Console,
  terminal: Asking = { input: process.stdin, output: process.stdout },
): Promise<number> {
  if (file.trim() === '') throw new Known('name the file to be written, such as my-plant.yaml', exits.usage);
  refuseTaken(file, options.replace === true);
  const answers = await asked(options, terminal);
  const text = starterText(answers, file, options.editor === true);
  put(file, text, options.replace === true);
  const made = [file];
  if (options.editor) {
    const beside = join(dirname(file), editorSchemaName);
    if (!existsSync(beside)) {
      put(beside, schemaText(), false);
      made.push(beside);
    }
  }
  const name = /^[\w./-]+$/.test(file) ? file : `"${file}"`;
  console.say([
    `Written: ${made.join(', ')} (${answers.starter.name}: ${answers.starter.what})`,
    '',
    `  upsettle check ${name}    the plant as understood, and what is unusual about it`,
    `  upsettle run ${name}      start-up and upsets, with pictures`,
  ]);
  return exits.done;
}

interface Answers {
  readonly starter: Starter;
  readonly title: string;
  readonly solutes: readonly string[];
}

function refuseTaken(file: string, replace: boolean): void {
  const about = statSync(file, { throwIfNoEntry: false });
  if (about?.isDirectory())
    throw new Known(
      `${file} is a folder; name a file in it, such as ${join(file, 'my-plant.yaml')}`,
      exits.usage,
    );
  if (about && !replace)
    throw new Known(`${file} is there already; choose another name, or write --replace`, exits.usage);
}

/** What the options leave open is asked on a terminal; elsewhere the kind must be stated, and the rest has defaults. */
async function asked(options: NewOptions, { input, output }: Asking): Promise<Answers> {
  const kind = options.kind === undefined ? undefined : kindNamed(options.kind);
  const ask = kind === undefined && input.isTTY === true && output.isTTY === true;
  if (kind === undefined && !ask)
    throw new Known(`which kind of plant? Write --kind and one of:\n${list()}`, exits.usage);
  if (!ask) return filled(kind as Starter, options.title, options.solutes);
  const lines = createInterface({ input, output });
  const next = typedLines(lines);
  const question = async (text: string, usual: string): Promise<string> => {
    output.write(`${text} [${usual}]: `);
    return (await next()).trim() || usual;
  };
  try {
    output.write(`Kinds of plants:\n${list()}\n`);
    const starter = kindNamed(await question('Kind, by number or name', '1'));
    const title = options.title ?? (await question('Title', usualTitle(starter)));
    const what = starter.solutes.length > 1 ? `The ${starter.solutes.length} solutes` : 'The solute';
    const solutes = options.solutes ?? (await question(what, starter.solutes.join(', ')));
    return filled(starter, title, solutes);
  } finally {
    lines.close();
  }
}

/** Lines one by one as they are asked for; what is typed ahead, or pasted, waits. */
function typedLines(from: Interface): () => Promise<string> {
  const ahead: string[] = [];
  let ended = false;
  let waiting: { resolve(line: string): void; reject(e: Known): void } | null = null;
  const gone = (): Known => new Known('\nnothing was written', exits.interrupted);
  from.on('line', (line) => {
    if (waiting) waiting.resolve(line);
    else ahead.push(line);
    waiting = null;
  });
  from.once('close', () => {
    ended = true;
    waiting?.reject(gone());
  });
  return () => {
    const line = ahead.shift();
    if (line !== undefined) return Promise.resolve(line);
    if (ended) return Promise.reject(gone());
    return new Promise((resolve, reject) => {
      waiting = { resolve, reject };
    });
  };
}

const usualTitle = (s: Starter): string => `My ${s.name} plant`;

function filled(starter: Starter, title = usualTitle(starter), solutes = starter.solutes.join(',')): Answers {
  const names = solutes.split(',').map((n) => n.trim());
  if (names.length !== starter.solutes.length)
    throw new Known(
      `--solutes: ${starter.name} has ${starter.solutes.length}; write ${starter.solutes.length > 1 ? `as many, such as --solutes ${starter.solutes.join(',')}` : `one name, such as --solutes ${starter.solutes[0]}`}`,
      exits.usage,
    );
  return { starter, title, solutes: names };
}

function kindNamed(text: string): Starter {
  const found = starters[Number(text) - 1] ?? starterNamed(text);
  if (found) return found;
  const names = starters.map((s) => s.name);
  const near = hint(text, names);
  const known = near.includes('known here') ? '' : `; the kinds are ${names.join(', ')}`;
  throw new Known(`--kind: unknown kind ${show(text)}${near}${known}`, exits.usage);
}

const list = (): string => starters.map((s, i) => `  ${i + 1}  ${s.name.padEnd(8)}  ${s.what}`).join('\n');

/** The scenario, proved by reading it: names of the user's own may be none that a scenario can have. */
function starterText({ starter, title, solutes }: Answers, file: string, editor: boolean): string {
  const text = `${editor ? `${modeline(editorSchemaName)}\n` : ''}${starter.text({ title, solutes })}`;
  try {
    readScenario(text, { file, folder: dirname(resolve(file)) });
    return text;
  } catch (e) {
    if (!(e instanceof ScenarioError)) throw e;
    const { path, message } = e.located[0];
    throw new Known(`${path.startsWith('title') ? '--title' : '--solutes'}: ${message}`, exits.usage);
  }
}

function put(file: string, text: string, replace: boolean): void {
  try {
    writeFileSync(file, text, { flag: replace ? 'w' : 'wx' });
  } catch (e) {
    const { code } = e as NodeJS.ErrnoException;
    const why =
      code === 'ENOENT'
        ? `there is no folder ${dirname(file)}; make it first`
        : code === 'EEXIST'
          ? 'it is there already; choose another name, or write --replace'
          : `${code}; choose a place where you may write`;
    throw new Known(`cannot write ${file}: ${why}`, exits.usage);
  }
}
