import {
  accessSync,
  closeSync,
  constants,
  existsSync,
  mkdirSync,
  openSync,
  readFileSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { basename, dirname, extname, join, resolve } from 'node:path';
import { type ReadScenario, readScenario, ScenarioError } from '../scenario/read.ts';
import { exits, Known } from './exit.ts';

/** Bytes of a scenario file that are read at all; what a scenario may have is the reader's business. */
const LARGEST = 20e6;

/** Reads and checks a scenario file. @throws Known with every complaint and its place. */
export function openScenario(file: string): ReadScenario {
  if (file === '')
    throw new Known('the name of the scenario file is empty; write it after the verb', exits.usage);
  let text: string;
  try {
    const about = statSync(file);
    if (!about.isFile()) throw new Known(`${file}:1:1 is not a file; name a scenario file`, exits.refused);
    if (about.size > LARGEST)
      throw new Known(
        `${file}:1:1 has ${Math.round(about.size / 1e6)} MB, more than any scenario; name a scenario file`,
        exits.refused,
      );
    text = readFileSync(file, 'utf8');
  } catch (e) {
    if (e instanceof Known) throw e;
    const why =
      (e as NodeJS.ErrnoException).code === 'ENOENT'
        ? `there is no such file; upsettle new ${file} writes one to begin with`
        : `cannot be read (${(e as NodeJS.ErrnoException).code}); look at its folder and permissions`;
    throw new Known(`${file}:1:1 ${why}`, exits.refused);
  }
  try {
    return readScenario(text, { file, folder: dirname(file) });
  } catch (e) {
    if (e instanceof ScenarioError) throw new Known(e.message, exits.refused);
    throw e;
  }
}

/**
 * Where the outputs of a verb go: `out/<scenario>/<verb>` unless told otherwise. It is not made before there is
 * something to write, but a place where it cannot be made is found before hours are computed.
 *
 * @throws Known where the folder cannot be made or written to.
 */
export function outputFolder(file: string, verb: string, given: string | undefined): string {
  const folder = given ?? join('out', basename(file, extname(file)), verb);
  let there = resolve(folder);
  while (!existsSync(there) && there !== dirname(there)) there = dirname(there);
  if (!statSync(there).isDirectory())
    throw new Known(`cannot make the folder ${folder}: ${there} is a file; write another --out`, exits.usage);
  try {
    accessSync(there, constants.W_OK);
  } catch (e) {
    throw new Known(
      `cannot write to ${there} (${(e as NodeJS.ErrnoException).code}); write another --out`,
      exits.usage,
    );
  }
  return folder;
}

export function makeFolder(folder: string): void {
  try {
    makePath(resolve(folder));
  } catch (e) {
    throw new Known(
      `cannot make the folder ${folder} (${(e as NodeJS.ErrnoException).code}); write another --out`,
      exits.usage,
    );
  }
}

/** Folder by folder: the recursive call of Node never returns where the file system refuses with ENOENT. */
function makePath(folder: string): void {
  if (statSync(folder, { throwIfNoEntry: false })?.isDirectory()) return;
  const parent = dirname(folder);
  if (parent !== folder) makePath(parent);
  mkdirSync(folder);
}

export function writeJson(folder: string, name: string, value: object): void {
  write(folder, name, `${JSON.stringify(value, null, 2)}\n`);
}

export function write(folder: string, name: string, content: string | Buffer): void {
  try {
    writeFileSync(resolve(folder, name), content);
  } catch (e) {
    throw new Known(
      `cannot write ${resolve(folder, name)} (${(e as NodeJS.ErrnoException).code})`,
      exits.usage,
    );
  }
}

/** Characters gathered before they are written. */
const CHUNK = 1 << 17;

/** A file that is written as its lines come. */
export class GrowingFile {
  readonly #path: string;
  readonly #file: number;
  #text = '';

  /** @throws Known where it cannot be made. */
  constructor(folder: string, name: string) {
    this.#path = resolve(folder, name);
    this.#file = this.#tried(() => openSync(this.#path, 'w'));
  }

  /** @throws Known where the disk does not take it. */
  add(text: string): void {
    this.#text += text;
    if (this.#text.length >= CHUNK) this.#flush();
  }

  close(): void {
    this.#flush();
    closeSync(this.#file);
  }

  #flush(): void {
    this.#tried(() => writeFileSync(this.#file, this.#text));
    this.#text = '';
  }

  #tried<T>(act: () => T): T {
    try {
      return act();
    } catch (e) {
      throw new Known(`cannot write ${this.#path} (${(e as NodeJS.ErrnoException).code})`, exits.usage);
    }
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
