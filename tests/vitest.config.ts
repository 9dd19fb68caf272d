import { defineConfig } from 'vitest/config';
import { PlainSummary } from './support/plain-summary.ts';

const root = new URL('..', import.meta.url).pathname;

export default defineConfig({
  root,
  test: {
    include: ['tests/**/*.test.ts'],
    exclude: ['tests/**/*.slow.test.ts', '**/node_modules/**'],
    reporters: ['default', new PlainSummary()],
    testTimeout: 60_000,
    hookTimeout: 120_000,
    maxWorkers: 2,
  },
});
