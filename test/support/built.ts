import { execFileSync } from 'node:child_process';
import { existsSync, readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../../', import.meta.url));

/** Builds what the command and the library run from, once before all tests and only where it is older than its source. */
export function setup(): void {
  const built = join(root, 'dist/upsettle.js');
  const when = existsSync(built) ? statSync(built).mtimeMs : 0;
  const newer = readdirSync(join(root, 'src'), { recursive: true, encoding: 'utf8' }).some(
    (name) => statSync(join(root, 'src', name)).mtimeMs > when,
  );
  if (newer) execFileSync(process.execPath, [join(root, 'src/build/prepare.mjs')]);
}
