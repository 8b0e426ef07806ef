// Lists every package that an installed Upsettle uses, with its version and licence; --all adds those for development.
// Ends with 1 where one of those that are used has no licence that lets it be passed on with an MIT program.
import { existsSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../../', import.meta.url));
const read = (path) => JSON.parse(readFileSync(`${root}${path}`, 'utf8'));

/** Licences under which a package may be used and passed on with its notice kept. */
const FREE = [
  'MIT',
  'ISC',
  '0BSD',
  'BSD-2-Clause',
  'BSD-3-Clause',
  'Apache-2.0',
  'CC0-1.0',
  'Unlicense',
  'BlueOak-1.0.0',
];
/** Packages that state their licence in words: read, and what it is. */
const READ = { 'dejavu-fonts-ttf': 'Bitstream Vera (free), changes public domain' };

const all = process.argv.includes('--all');
const rows = Object.entries(read('package-lock.json').packages)
  .filter(([path, p]) => path !== '' && !p.link && (all || !p.dev))
  // The stand-in of the canvas is a part of this program.
  .filter(([path]) => path.includes('node_modules/'))
  .map(([path, p]) => {
    const name = path.slice(path.lastIndexOf('node_modules/') + 'node_modules/'.length);
    const own = existsSync(`${root}${path}/package.json`) ? read(`${path}/package.json`).license : undefined;
    const stated = typeof own === 'string' ? own : (p.license ?? 'none stated');
    const licence = READ[name] ?? stated;
    const free = name in READ || licence.split(/ OR |[()]/).some((l) => FREE.includes(l));
    return {
      name,
      version: p.version,
      licence,
      free,
      use: p.dev ? 'development' : p.optional ? 'optional' : 'used',
    };
  })
  .sort((a, b) => a.name.localeCompare(b.name));

const width = Math.max(...rows.map((r) => r.name.length));
for (const r of rows)
  console.log(
    `${r.name.padEnd(width)}  ${r.version.padEnd(14)}  ${r.use.padEnd(11)}  ${r.licence}${r.free ? '' : '  <- look at it'}`,
  );
const doubtful = rows.filter((r) => !r.free && r.use !== 'development');
const count = new Set(rows.map((r) => r.licence)).size;
console.log(
  `\n${rows.length} packages, ${count} licences${doubtful.length > 0 ? `; to be looked at: ${doubtful.map((r) => r.name).join(', ')}` : ', all of those in use free to pass on'}`,
);
process.exitCode = doubtful.length > 0 ? 1 : 0;
