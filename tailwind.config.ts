import type { Config } from 'tailwindcss';

/** Colours are custom properties (src/app.css), so that one class serves both themes. */
export default {
	content: ['./src/**/*.{html,svelte,ts}'],
	darkMode: ['selector', '[data-theme="dark"]'],
	theme: {
		extend: {
			fontFamily: { sans: ['"Source Sans 3"', 'sans-serif'] },
			colors: {
				paper: { DEFAULT: 'var(--paper)', sunk: 'var(--paper-sunk)' },
				sheet: 'var(--sheet)',
				ink: { DEFAULT: 'var(--ink)', soft: 'var(--ink-soft)' },
				line: { DEFAULT: 'var(--line)', strong: 'var(--line-strong)' },
				accent: { DEFAULT: 'var(--accent)', ink: 'var(--accent-ink)' },
				brass: { DEFAULT: 'var(--brass)', fill: 'var(--brass-fill)' },
				vermilion: 'var(--vermilion)',
				moss: 'var(--moss)'
			}
		}
	}
} satisfies Config;
