import type { Config } from 'tailwindcss';

export default {
	content: ['./src/**/*.{html,svelte,ts}'],
	darkMode: ['selector', '[data-theme="dark"]'],
	theme: { extend: { fontFamily: { sans: ['"Source Sans 3"', 'sans-serif'] } } }
} satisfies Config;
