// Times the integration of the reference cases, warm, one core, amounts, totals and records included.
//   npm run bench -- [--case ten] [--repeats 51] [--json] [--against PATH]
// PATH is the compiled comparison program for case "ten"; it then runs in turn with ours, and ratios at equal error are printed.
import { execFileSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { cpus } from 'node:os';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { cases, once, prepare } from './cases.mjs';
import { concentrations, worstError } from './error.mjs';
import { byOdex, bySciPy, compiledProgram } from './others.mjs';

const EQUAL_ERRORS = [5e-4, 4e-5, 5e-6];

function refuse(message) {
  process.stderr.write(`bench: ${message}\n`);
  process.exit(2);
}

function read() {
  try {
    const { values } = parseArgs({
      options: {
        case: { type: 'string' },
        repeats: { type: 'string', default: '51' },
        json: { type: 'boolean', default: false },
        against: { type: 'string' },
      },
    });
    if (values.case !== undefined && !(values.case in cases))
      refuse(`--case: expected one of ${Object.keys(cases).join(', ')}, got '${values.case}'`);
    if (!/^[1-9]\d*$/.test(values.repeats))
      refuse(`--repeats: expected a whole number above 0, got '${values.repeats}'`);
    if (values.against !== undefined && !existsSync(values.against))
      refuse(`--against: there is no file '${values.against}'; build the comparison program first`);
    return values;
  } catch (e) {
    return refuse(e.message);
  }
}

const asked = read();
const median = (list) => [...list].sort((a, b) => a - b)[(list.length - 1) >> 1];
const at = (list, q) => [...list].sort((a, b) => a - b)[Math.floor(q * (list.length - 1))];

/** Bytes allocated a step; null where the run is too large for the measurement. */
function allocations(name) {
  const script = fileURLToPath(new URL('./allocations.mjs', import.meta.url));
  const flags = ['--expose-gc', '--max-semi-space-size=128', script, name];
  return JSON.parse(execFileSync(process.execPath, flags, { encoding: 'utf8' })).step;
}

function measure(p, repeats, program) {
  const c = cases[p.name];
  const reference = concentrations(p, c.tight);
  const own = c.tolerances.map((rtol) => ({
    rtol,
    error: worstError(concentrations(p, rtol), reference),
    times: [],
    work: null,
  }));
  const others = (program ?? []).map((q) => ({ ...q, results: [] }));
  const warm = Math.max(2, Math.round((20 * repeats) / 51));
  for (const q of own) for (let k = 0; k < 4 * warm; k++) once(p, q.rtol);
  // In turn, so that a slow spell of the machine meets all alike.
  const rounds = others.length > 0 ? 5 : 1;
  for (let round = 0; round < rounds; round++) {
    for (const q of own)
      for (let k = 0; k < Math.ceil(repeats / rounds); k++) {
        const { ms, work } = once(p, q.rtol);
        q.times.push(ms);
        q.work = work;
      }
    for (const q of others) q.results.push(q.measure());
  }
  const rows = own.map(({ rtol, error, times, work }) => ({
    case: p.name,
    rtol,
    worst_error: error,
    median_ms: median(times),
    low_ms: at(times, 0.1),
    high_ms: at(times, 0.9),
    steps: work.steps,
    rejected: work.rejectedByError,
    factorisations: work.factorisations,
    us_per_step: (1e3 * median(times)) / work.steps,
    places: p.plant.system.places.length,
    setup_ms: p.setup_ms,
  }));
  const compared = others.map(({ results }) => ({
    ...results[0],
    median_ms: median(results.map((r) => r.median_ms)),
  }));
  return { rows, compared, reference };
}

/** ms at an error, by straight lines between the points of a sweep in logarithms. */
function msAt(rows, error) {
  const list = [...rows].sort((a, b) => b.worst_error - a.worst_error);
  for (let k = 1; k < list.length; k++) {
    const [a, b] = [list[k - 1], list[k]];
    if (error > a.worst_error || error < b.worst_error) continue;
    const share = Math.log(error / a.worst_error) / Math.log(b.worst_error / a.worst_error);
    return a.median_ms * (b.median_ms / a.median_ms) ** share;
  }
  return null;
}

const rows = [];
const ratios = [];
for (const name of Object.keys(cases).filter((c) => asked.case === undefined || c === asked.case)) {
  const p = prepare(name);
  const repeats = Math.min(Number(asked.repeats), cases[name].repeats ?? Infinity);
  const program = name === 'ten' && asked.against ? compiledProgram(asked.against, 11) : null;
  const m = measure(p, repeats, program);
  const memory_mb = process.memoryUsage().rss / 1e6;
  const bytes = name === 'stages 1000' ? null : allocations(name);
  rows.push(...m.rows.map((r) => ({ ...r, bytes_per_step: bytes, memory_mb })));
  if (name !== 'ten') continue;
  rows.push(byOdex(p, m.reference, 1e-4), ...(bySciPy() === null ? [] : [bySciPy()]));
  rows.push(...m.compared);
  const others = [...m.compared];
  for (const error of EQUAL_ERRORS) {
    const [own, theirs] = [msAt(m.rows, error), msAt(others, error)];
    if (own !== null && theirs !== null)
      ratios.push({ worst_error: error, ours_ms: own, compiled_ms: theirs, ratio: own / theirs });
  }
}

if (asked.json)
  process.stdout.write(`${JSON.stringify({ cpu: cpus()[0].model, node: process.version, rows, ratios })}\n`);
else print();

function print() {
  const say = (text) => process.stdout.write(`${text}\n`);
  say(`${cpus()[0].model}, node ${process.version}, medians (10 % to 90 %)`);
  const head = [
    'case',
    'rtol',
    'error',
    'ms',
    '',
    'steps',
    'rejected',
    'µs/step',
    'bytes/step',
    'places',
    'set-up ms',
    'MB',
  ];
  const cell = (v, digits) => (v === undefined || v === null ? '' : v.toFixed(digits));
  const table = rows.map((r) => [
    r.case,
    r.rtol.toExponential(0),
    r.worst_error.toExponential(1),
    cell(r.median_ms, 3),
    r.low_ms === undefined ? '' : `(${r.low_ms.toFixed(3)}-${r.high_ms.toFixed(3)})`,
    String(r.steps || ''),
    cell(r.rejected, 0),
    cell(r.us_per_step, 2),
    cell(r.bytes_per_step, 0),
    cell(r.places, 0),
    cell(r.setup_ms, 0),
    cell(r.memory_mb, 0),
  ]);
  const widths = head.map((h, i) => Math.max(h.length, ...table.map((row) => row[i].length)));
  for (const row of [head, ...table])
    say(
      row
        .map((c, i) => (i === 0 ? c.padEnd(widths[0]) : c.padStart(widths[i])))
        .join('  ')
        .trimEnd(),
    );
  for (const r of ratios)
    say(
      `at error ${r.worst_error.toExponential(0)}: ours ${r.ours_ms.toFixed(3)} ms, compiled ${r.compiled_ms.toFixed(3)} ms, ratio ${r.ratio.toFixed(3)}`,
    );
}
