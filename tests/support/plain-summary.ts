import type { Reporter, TestModule } from 'vitest/node';

/** Ends a run with one line any CI can read: `N passed, N failed, N skipped`. */
export class PlainSummary implements Reporter {
  onTestRunEnd(modules: readonly TestModule[]): void {
    const count = { passed: 0, failed: 0, skipped: 0 };
    for (const module of modules) {
      let failed = 0;
      for (const test of module.children.allTests()) {
        const state = test.result().state;
        if (state === 'passed' || state === 'failed' || state === 'skipped') count[state]++;
        if (state === 'failed') failed++;
      }
      // A file that did not load, or whose set-up threw, has failed though none of its tests says so.
      if (failed === 0 && module.state() === 'failed') count.failed++;
    }
    console.log(`\n${count.passed} passed, ${count.failed} failed, ${count.skipped} skipped`);
  }
}
