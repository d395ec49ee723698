import { sveltekit } from '@sveltejs/kit/vite';
import tailwindcss from '@tailwindcss/vite';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';

const lib = fileURLToPath(new URL('./src/lib', import.meta.url));

export default defineConfig(({ mode }) => ({
  // Vitest runs the code in plain Node, without the Svelte plugin: proof that core and server are free of it.
  plugins: mode === 'test' ? [] : [tailwindcss(), sveltekit()],
  server: { fs: { allow: ['src', 'static', 'node_modules'] } },
  test: {
    projects: [
      {
        resolve: { alias: { $lib: lib } },
        test: {
          name: 'unit',
          include: ['src/**/*.test.ts', 'tests/unit/**/*.test.ts', 'tests/reference/**/*.test.ts'],
          environment: 'node',
          expect: { requireAssertions: true }
        }
      },
      {
        resolve: { alias: { $lib: lib } },
        test: {
          name: 'integration',
          include: ['tests/integration/**/*.test.ts'],
          environment: 'node',
          expect: { requireAssertions: true },
          fileParallelism: false,
          testTimeout: 60_000,
          hookTimeout: 120_000
        }
      },
      {
        resolve: { alias: { $lib: lib } },
        test: {
          name: 'e2e',
          include: ['tests/e2e/**/*.test.ts'],
          environment: 'node',
          expect: { requireAssertions: true },
          fileParallelism: false,
          testTimeout: 180_000,
          hookTimeout: 180_000
        }
      }
    ]
  }
}));
