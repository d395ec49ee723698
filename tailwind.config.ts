import type { Config } from 'tailwindcss';

/** Colours are CSS variables (src/app.css), so that a theme is a change of variables and print can override them. */
export default {
  content: ['./src/**/*.{html,svelte,ts}'],
  theme: {
    extend: {
      colors: {
        paper: 'var(--paper)',
        sheet: 'var(--sheet)',
        ink: 'var(--ink)',
        ink2: 'var(--ink2)',
        ink3: 'var(--ink3)',
        rule: 'var(--rule)',
        rule2: 'var(--rule2)',
        moss: 'var(--moss)',
        ochre: 'var(--ochre)',
        brick: 'var(--brick)',
        blue: 'var(--blue)',
        wash: 'var(--wash)',
        band: 'var(--band)'
      },
      fontFamily: {
        sans: ['"IBM Plex Sans"', 'sans-serif'],
        mono: ['"IBM Plex Mono"', 'monospace']
      }
    }
  }
} satisfies Config;
