import adapter from '@sveltejs/adapter-node';
import { vitePreprocess } from '@sveltejs/vite-plugin-svelte';

/** @type {import('@sveltejs/kit').Config} */
export default {
  preprocess: vitePreprocess(),
  kit: {
    // The tests build beside a running product, so both folders can be moved.
    outDir: process.env.RIVENMARK_KIT_DIR || '.svelte-kit',
    adapter: adapter({ out: process.env.RIVENMARK_BUILD_DIR || 'build', envPrefix: '' }),
    // Tests, the command line and the operating scripts are type-checked together with the application.
    typescript: {
      config: (config) => {
        config.include.push('../src/**/*.mjs', '../tests/**/*.ts', '../*.config.ts', '../drizzle.config.ts');
        return config;
      }
    }
  }
};
