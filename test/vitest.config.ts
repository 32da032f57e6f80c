import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';

export default defineConfig({
  resolve: {
    alias: { 'liftwright/plant': fileURLToPath(new URL('../src/plant/plant.ts', import.meta.url)) },
  },
  root: fileURLToPath(new URL('..', import.meta.url)),
  test: {
    include: ['test/**/*.test.ts'],
    testTimeout: 60_000,
    pool: 'forks',
  },
});
