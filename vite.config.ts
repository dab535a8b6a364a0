import { sveltekit } from '@sveltejs/kit/vite';
import tailwindcss from '@tailwindcss/vite';
import { defineConfig } from 'vitest/config';

const node = (name: string, include: string[], extra: Record<string, unknown> = {}) => ({
  extends: true as const,
  test: {
    name,
    environment: 'node' as const,
    include,
    setupFiles: ['tests/support/no-stray-console.ts'],
    env: { COILYARD_MODE: 'test', LOG_LEVEL: 'silent' },
    ...extra,
  },
});

export default defineConfig({
  plugins: [tailwindcss(), sveltekit()],
  build: { assetsInlineLimit: 0 },
  worker: { format: 'es' },
  test: {
    expect: { requireAssertions: true },
    projects: [
      node('unit', ['src/**/*.test.ts', 'fake-services/**/*.test.ts', 'tests/architecture/**/*.test.ts']),
      node('published', ['tests/published/**/*.test.ts'], { testTimeout: 60_000 }),
      node('integration', ['tests/integration/**/*.test.ts', 'tests/authorization/**/*.test.ts'], {
        testTimeout: 30_000,
        hookTimeout: 60_000,
      }),
    ],
  },
});
