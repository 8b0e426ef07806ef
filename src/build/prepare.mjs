// Builds dist/ after an install in a clone; skipped where the development packages are not installed.
import { execFileSync } from 'node:child_process';
import { chmodSync, existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const at = (path) => fileURLToPath(new URL(path, import.meta.url));
const tsc = at('../../node_modules/typescript/bin/tsc');
if (existsSync(tsc)) {
  execFileSync(process.execPath, [tsc, '-p', at('./tsconfig.json')], { stdio: 'inherit' });
  chmodSync(at('../../dist/cli/upsettle.js'), 0o755);
} else console.log('prepare: TypeScript is not installed, dist/ is left as it is');
