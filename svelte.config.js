import adapter from '@sveltejs/adapter-node';
import { vitePreprocess } from '@sveltejs/vite-plugin-svelte';

/** @type {import('@sveltejs/kit').Config} */
export default {
  preprocess: vitePreprocess(),
  kit: {
    adapter: adapter({ out: 'build', envPrefix: '' }),
    // Tests, the command line and the operating scripts are type-checked together with the application.
    typescript: {
      config: (config) => {
        config.include.push('../src/**/*.mjs', '../tests/**/*.ts', '../*.config.ts', '../drizzle.config.ts');
        return config;
      }
    }
  }
};
