import { defineConfig } from 'vitest/config';

/** Tests in three projects: `unit` and `reference` in Node, `browser` driving a real Chromium from Node. */
export default defineConfig({
  test: {
    projects: [
      { test: { name: 'unit', include: ['test/unit/**/*.test.ts'], testTimeout: 30_000 } },
      { test: { name: 'reference', include: ['test/reference/**/*.test.ts'], testTimeout: 300_000 } },
      {
        test: {
          name: 'browser',
          include: ['test/browser/**/*.test.ts'],
          testTimeout: 120_000,
          hookTimeout: 120_000,
          fileParallelism: false,
        },
      },
    ],
  },
});
