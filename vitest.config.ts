import { defineConfig } from 'vitest/config';

const isLong = process.env['HEDDLE_TEST_LONG'] === '1';

export default defineConfig({
  test: {
    include: ['tests/**/*.test.ts'],
    globalSetup: ['tests/servers/global-setup.ts'],
    setupFiles: ['tests/properties.ts'],
    pool: 'forks',
    maxWorkers: 2,
    testTimeout: isLong ? 1_800_000 : 120_000,
    hookTimeout: 120_000,
    restoreMocks: true,
    unstubEnvs: true,
    allowOnly: false,
  },
});
