import type { Reporter, TestModule } from "vitest/node";

/** Prints, alone and last, the line that any reader of a log can count by: `N passed, N failed, N skipped`. */
export default class PlainCountReporter implements Reporter {
  onTestRunEnd(modules: readonly TestModule[], unhandledErrors: readonly unknown[]): void {
    let passed = 0;
    let failed = unhandledErrors.length;
    let skipped = 0;
    for (const module of modules) {
      // A module that could not be loaded ran none of its tests: that is a failure of its own.
      if (module.state() === "failed" && [...module.children.allTests()].length === 0) failed += 1;
      for (const test of module.children.allTests()) {
        const { state } = test.result();
        if (state === "passed") passed += 1;
        else if (state === "failed") failed += 1;
        else skipped += 1;
      }
    }
    setImmediate(() => process.stdout.write(`\n${passed} passed, ${failed} failed, ${skipped} skipped\n`));
  }
}
