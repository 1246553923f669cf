/** Colours for painting, as CSS texts; read from the page's custom properties by the canvas. */
export interface PaintTheme {
	readonly sheet: string;
	readonly ink: string;
	readonly inkSoft: string;
	readonly line: string;
	readonly accent: string;
	readonly paper: string;
	readonly brass: string;
	readonly brassFill: string;
	readonly vermilion: string;
	readonly straps: Readonly<Record<'input' | 'regulated' | 'ground', string>>;
	readonly washLow: string;
	readonly washHigh: string;
}

/** Custom property of each colour. */
const PROPERTIES = {
	sheet: '--sheet',
	ink: '--ink',
	inkSoft: '--ink-soft',
	line: '--line',
	accent: '--accent',
	paper: '--paper',
	brass: '--brass',
	brassFill: '--brass-fill',
	vermilion: '--vermilion',
	washLow: '--wash-low',
	washHigh: '--wash-high'
} as const;

/** The theme of a page. @param valueOf gives the value of a custom property */
export function readTheme(valueOf: (property: string) => string): PaintTheme {
	const read = (property: string) => valueOf(property).trim();
	const plain = Object.fromEntries(
		Object.entries(PROPERTIES).map(([name, property]) => [name, read(property)])
	) as Record<keyof typeof PROPERTIES, string>;
	return {
		...plain,
		straps: {
			input: read('--strap-input'),
			regulated: read('--strap-regulated'),
			ground: read('--strap-ground')
		}
	};
}
