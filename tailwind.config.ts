import type { Config } from 'tailwindcss';
import plugin from 'tailwindcss/plugin';

/**
 * The colours of the product, in OKLCH. Vermilion is only for a broken limit and moss only for a
 * settled one; what they say always stands in words or shapes as well. `wash-low` to `wash-high` is
 * the drop map's one hue: its lightness runs in even steps.
 */
const light = {
	/** The page. */
	paper: 'oklch(0.975 0.008 85)',
	/** Fields, rows under the pointer, the desk around the die. */
	'paper-sunk': 'oklch(0.945 0.011 85)',
	/** The die, and what lies on top of the page. */
	sheet: 'oklch(0.99 0.012 88)',
	ink: 'oklch(0.25 0.02 270)',
	'ink-soft': 'oklch(0.45 0.02 270)',
	/** Hairlines between rows; never the only sign of a control. */
	line: 'oklch(0.87 0.012 85)',
	/** Edges of controls and rules that divide a page. */
	'line-strong': 'oklch(0.6 0.015 85)',
	'wash-low': 'oklch(0.985 0.007 280)',
	'wash-high': 'oklch(0.3 0.13 280)',
	/** The one thing to do on a screen, and focus. */
	accent: 'oklch(0.42 0.13 280)',
	'accent-ink': 'oklch(0.985 0.008 85)',
	/** What can be placed, and what is chosen. */
	brass: 'oklch(0.52 0.095 78)',
	'brass-fill': 'oklch(0.84 0.085 84)',
	'brass-wash': 'oklch(0.925 0.05 86)',
	vermilion: 'oklch(0.52 0.19 32)',
	moss: 'oklch(0.46 0.09 150)',
	'strap-input': 'oklch(0.6 0.09 60)',
	'strap-regulated': 'oklch(0.5 0.08 275)',
	'strap-ground': 'oklch(0.56 0.02 200)'
} as const;

export type Token = keyof typeof light;

/** The same room by lamplight: warm dark paper, pale ink, and a wash that grows light instead of dark. */
const dark: Record<Token, string> = {
	paper: 'oklch(0.225 0.009 65)',
	'paper-sunk': 'oklch(0.19 0.009 65)',
	sheet: 'oklch(0.262 0.011 70)',
	ink: 'oklch(0.93 0.014 85)',
	'ink-soft': 'oklch(0.75 0.016 85)',
	line: 'oklch(0.34 0.012 70)',
	'line-strong': 'oklch(0.57 0.016 75)',
	'wash-low': 'oklch(0.262 0.02 285)',
	'wash-high': 'oklch(0.88 0.09 285)',
	accent: 'oklch(0.8 0.1 285)',
	'accent-ink': 'oklch(0.2 0.03 280)',
	brass: 'oklch(0.8 0.1 84)',
	'brass-fill': 'oklch(0.46 0.075 78)',
	'brass-wash': 'oklch(0.33 0.045 78)',
	vermilion: 'oklch(0.75 0.15 36)',
	moss: 'oklch(0.78 0.1 150)',
	'strap-input': 'oklch(0.72 0.09 65)',
	'strap-regulated': 'oklch(0.7 0.09 280)',
	'strap-ground': 'oklch(0.66 0.02 200)'
};

export const THEMES: Record<'light' | 'dark', Record<Token, string>> = { light, dark };

function properties(theme: Record<Token, string>): Record<string, string> {
	return Object.fromEntries(Object.entries(theme).map(([name, value]) => [`--${name}`, value]));
}

export default {
	content: ['./src/**/*.{html,svelte,ts}'],
	darkMode: ['selector', '[data-theme="dark"]'],
	theme: {
		extend: {
			fontFamily: { sans: ['"Source Sans 3"', 'sans-serif'] },
			fontSize: {
				xs: ['0.75rem', '1.35'],
				sm: ['0.8125rem', '1.4'],
				base: ['0.9375rem', '1.45'],
				lg: ['1.125rem', '1.3'],
				xl: ['1.375rem', '1.25'],
				'2xl': ['1.75rem', '1.15'],
				'3xl': ['2.25rem', '1.1']
			},
			spacing: {
				/** Least side of anything to point at. */
				target: '1.5rem',
				/** Height of controls in panels and in forms. */
				control: '1.75rem',
				'control-lg': '2.25rem'
			},
			// One class serves both themes: it names the custom property that the theme sets.
			colors: Object.fromEntries(Object.keys(light).map((name) => [name, `var(--${name})`]))
		}
	},
	plugins: [
		plugin(({ addBase }) => {
			addBase({
				':root': { 'color-scheme': 'light', ...properties(light) },
				':root[data-theme="dark"]': { 'color-scheme': 'dark', ...properties(dark) },
				// Paper is light, whatever the screen was.
				'@media print': {
					':root[data-theme="dark"]': { 'color-scheme': 'light', ...properties(light) }
				}
			});
		})
	]
} satisfies Config;
