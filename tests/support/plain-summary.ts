import type { Reporter, TestModule } from 'vitest/node';

/** Ends a run with one line any CI can read: `N passed, N failed, N skipped`. */
export class PlainSummary implements Reporter {
  onTestRunEnd(modules: readonly TestModule[]): void {
    const count = { passed: 0, failed: 0, skipped: 0 };
    for (const module of modules) {
      let tests = 0;
      for (const test of module.children.allTests()) {
        tests++;
        const state = test.result().state;
        if (state === 'passed' || state === 'failed' || state === 'skipped') count[state]++;
      }
      if (tests === 0 && module.state() === 'failed') count.failed++;
    }
    console.log(`\n${count.passed} passed, ${count.failed} failed, ${count.skipped} skipped`);
  }
}
