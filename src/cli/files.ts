import { createWriteStream, existsSync, mkdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { basename, dirname, extname, join } from 'node:path';
import { finished } from 'node:stream/promises';
import { type ReadScenario, readScenario, ScenarioError } from '../scenario/read.ts';
import { exits, Known } from './exit.ts';

/** Reads and checks a scenario file. @throws Known with every complaint and its place. */
export function openScenario(file: string): ReadScenario {
  let text: string;
  try {
    if (!statSync(file).isFile()) throw new Known(`${file}:1:1 is not a file`, exits.refused);
    text = readFileSync(file, 'utf8');
  } catch (e) {
    if (e instanceof Known) throw e;
    const why =
      (e as NodeJS.ErrnoException).code === 'ENOENT'
        ? 'there is no such file'
        : `cannot be read (${(e as NodeJS.ErrnoException).code})`;
    throw new Known(`${file}:1:1 ${why}`, exits.refused);
  }
  try {
    return readScenario(text, { file, folder: dirname(file) });
  } catch (e) {
    if (e instanceof ScenarioError) throw new Known(e.message, exits.refused);
    throw e;
  }
}

/** Where the outputs of a verb go: `out/<scenario>/<verb>` unless told otherwise. */
export function outputFolder(file: string, verb: string, given: string | undefined): string {
  const folder = given ?? join('out', basename(file, extname(file)), verb);
  try {
    mkdirSync(folder, { recursive: true });
  } catch (e) {
    throw new Known(`cannot make the folder ${folder} (${(e as NodeJS.ErrnoException).code})`, exits.usage);
  }
  return folder;
}

export function writeJson(folder: string, name: string, value: object): void {
  write(folder, name, `${JSON.stringify(value, null, 2)}\n`);
}

export function write(folder: string, name: string, content: string | Buffer): void {
  try {
    writeFileSync(join(folder, name), content);
  } catch (e) {
    throw new Known(`cannot write ${join(folder, name)} (${(e as NodeJS.ErrnoException).code})`, exits.usage);
  }
}

/** Opens a file for streaming, hands it to `fill`, and waits until all is on disk. */
export async function stream(
  folder: string,
  name: string,
  fill: (to: ReturnType<typeof createWriteStream>) => Promise<void>,
): Promise<void> {
  const path = join(folder, name);
  const to = createWriteStream(path);
  const done = finished(to);
  try {
    await Promise.race([fill(to).then(() => to.end()), done]);
    await done;
  } catch (e) {
    throw new Known(
      `cannot write ${path} (${(e as NodeJS.ErrnoException).code ?? (e as Error).message})`,
      exits.usage,
    );
  }
}

/** Version of the program, from its own package. */
export function version(): string {
  for (let folder = import.meta.dirname; folder !== dirname(folder); folder = dirname(folder)) {
    const path = join(folder, 'package.json');
    if (existsSync(path)) return (JSON.parse(readFileSync(path, 'utf8')) as { version: string }).version;
  }
  return 'unknown';
}
