import type { Reporter, TestModule } from "vitest/node";

/**
 * Ends the run with one line that a script can read: `12 passed, 0 failed`.
 * Whatever kept tests from running counts as failed too: a module that did not load, a hook, an error outside any test.
 */
export class ClosingLineReporter implements Reporter {
  onTestRunEnd(modules: readonly TestModule[], unhandled: readonly unknown[]): void {
    let passed = 0;
    let failed = unhandled.length;
    let skipped = 0;
    for (const module of modules) {
      failed += module.errors().length;
      for (const suite of module.children.allSuites()) failed += suite.errors().length;
      for (const test of module.children.allTests()) {
        const { state } = test.result();
        if (state === "passed") passed += 1;
        else if (state === "skipped") skipped += 1;
        else failed += 1;
      }
    }
    // Straight to the stream, after everything that the other reporters have written.
    process.stdout.write(`\n${passed} passed, ${failed} failed${skipped > 0 ? `, ${skipped} skipped` : ""}\n`);
  }
}
