// Bytes on the heap for each step, and for a run however short: node --expose-gc --max-semi-space-size=128 allocations.mjs CASE
// The young generation is larger than what the runs allocate, so that nothing is collected in between.
import { once, prepare } from './cases.mjs';

const p = prepare(process.argv[2]);
const RUNS = 40;

function bytes(tolerance) {
  for (let k = 0; k < 400; k++) once(p, tolerance, { bare: true });
  globalThis.gc();
  const before = process.memoryUsage().heapUsed;
  let steps = 0;
  for (let k = 0; k < RUNS; k++) steps = once(p, tolerance, { bare: true }).work.steps;
  return { bytes: (process.memoryUsage().heapUsed - before) / RUNS, steps };
}

const [few, many] = [bytes(1e-3), bytes(1e-7)];
const step = (many.bytes - few.bytes) / (many.steps - few.steps);
process.stdout.write(JSON.stringify({ step: Math.max(0, step), run: few.bytes - step * few.steps }));
