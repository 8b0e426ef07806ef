// Builds dist/ after an install in a clone; skipped where the development packages are not installed. The modules serve
// tests and other programs; the command is bundled into one file, which starts in half the time.
import { execFileSync } from 'node:child_process';
import { chmodSync, existsSync, rmSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const at = (path) => fileURLToPath(new URL(path, import.meta.url));
const packages = at('../../node_modules/');
const node = (script, ...args) =>
  execFileSync(process.execPath, [`${packages}${script}`, ...args], {
    stdio: ['ignore', 'ignore', 'inherit'],
  });

if (existsSync(`${packages}typescript/bin/tsc`)) {
  rmSync(at('../../dist'), { recursive: true, force: true });
  node('typescript/bin/tsc', '-p', at('./tsconfig.json'));
  node('rolldown/bin/cli.mjs', '-c', at('./bundle.mjs'));
  for (const command of ['upsettle.js', 'cli/upsettle.js']) chmodSync(at(`../../dist/${command}`), 0o755);
} else console.log('prepare: TypeScript is not installed, dist/ is left as it is');
