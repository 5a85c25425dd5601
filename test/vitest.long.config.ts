import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    root: new URL('..', import.meta.url).pathname,
    include: ['test/long/**/*.test.ts'],
    exclude: ['node_modules/**'],
    testTimeout: 3_600_000,
    hookTimeout: 3_600_000,
  },
})
