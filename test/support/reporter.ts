import type { Reporter, SerializedError, TestModule } from 'vitest/node';

/** Closes a test run with the plain line `N passed, N failed, N skipped`. */
export default class PlainTotals implements Reporter {
  onTestRunEnd(modules: ReadonlyArray<TestModule>, errors: ReadonlyArray<SerializedError>): void {
    const n = { passed: 0, failed: errors.length, skipped: 0, pending: 0 };
    for (const m of modules) {
      if (m.errors().length > 0) n.failed += 1;
      for (const t of m.children.allTests()) n[t.result().state] += 1;
    }
    process.stdout.write(`\n${n.passed} passed, ${n.failed + n.pending} failed, ${n.skipped} skipped\n`);
  }
}
