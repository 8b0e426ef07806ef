import { readFileSync } from 'node:fs';
import { dirname } from 'node:path';
import { fileURLToPath } from 'node:url';
import { readScenario } from '../../src/scenario/read.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';

const root = new URL('../../', import.meta.url);

/** Path of a file in the repository. */
export const inRepo = (path: string): string => fileURLToPath(new URL(path, root));

/** A scenario of `scenarios/`, checked. */
export function scenario(name: string): Scenario {
  const file = inRepo(`scenarios/${name}.yaml`);
  return readScenario(readFileSync(file, 'utf8'), { file, folder: dirname(file) }).scenario;
}

/** A scenario given as text. */
export const fromText = (text: string): Scenario =>
  readScenario(text, { file: 'test.yaml', folder: inRepo('scenarios') }).scenario;

/** Reference values kept with the script that made them. */
export const reference = (name: string): unknown =>
  JSON.parse(readFileSync(inRepo(`test/reference/${name}.json`), 'utf8'));
