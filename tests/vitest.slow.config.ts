import { defineConfig } from 'vitest/config';
import { PlainSummary } from './support/plain-summary.ts';

/** The slower tests: many seeds, third-party tools, other versions of Node. */
export default defineConfig({
  root: new URL('..', import.meta.url).pathname,
  test: {
    include: ['tests/**/*.slow.test.ts'],
    reporters: ['default', new PlainSummary()],
    testTimeout: 900_000,
    hookTimeout: 900_000,
    maxWorkers: 2,
  },
});
