// Others on the same case, for comparison: the compiled program, SciPy's best method for stiff systems, and odex.
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { once } from './cases.mjs';
import { concentrations, worstError } from './error.mjs';

const TOLERANCES = [1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 1e-6, 3e-7];

/** Makes the reference of the compiled program once; each further call is one sweep of its faster solver. */
export function compiledProgram(path, repeats) {
  const reference = join(mkdtempSync(join(tmpdir(), 'upsettle-bench-')), 'ten.ref');
  execFileSync(path, ['banded', '1e-12', '1', '10', '--write', reference]);
  const run = (solver, rtol) => {
    const r = JSON.parse(
      execFileSync(path, [solver, String(rtol), String(repeats), '10', '--reference', reference], {
        encoding: 'utf8',
      }),
    );
    return { worst_error: r.worst_error, median_ms: r.median_ms, steps: r.steps };
  };
  return TOLERANCES.map((rtol) => ({
    rtol,
    /** The faster of its two solvers, measured now. */
    measure() {
      const both = ['sparse', 'banded'].map((solver) => ({
        case: `compiled ${solver}`,
        rtol,
        ...run(solver, rtol),
      }));
      return both.reduce((a, b) => (b.median_ms < a.median_ms ? b : a));
    },
  }));
}

/** odex on the same equations, with records; one run, it is slow. */
export function byOdex(p, reference, tolerance) {
  const { ms, work } = once(p, tolerance, { integrator: 'odex' });
  const worst_error = worstError(concentrations(p, tolerance, 'odex'), reference);
  return { case: `${p.name} by odex`, rtol: tolerance, worst_error, median_ms: ms, steps: work.steps };
}

/** SciPy on the equations of case "ten" with its exact Jacobian; null where python3 or SciPy is missing. */
export function bySciPy() {
  const script = fileURLToPath(new URL('./scipy_ten.py', import.meta.url));
  const r = spawnSync('python3', [script], { encoding: 'utf8', timeout: 60_000 });
  return r.status === 0 ? JSON.parse(r.stdout) : null;
}
