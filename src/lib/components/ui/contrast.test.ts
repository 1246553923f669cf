import { converter, interpolate, wcagContrast } from 'culori';
import { describe, expect, it } from 'vitest';
import { THEMES, type Token } from '../../../../tailwind.config.ts';

/** Least contrasts of WCAG 2.2: 1.4.3 for text, 1.4.11 for controls and marks. */
const TEXT = 4.5;
const CONTROL = 3;

const PAIRS: readonly (readonly [Token, Token, number])[] = [
	['ink', 'paper', TEXT],
	['ink', 'paper-sunk', TEXT],
	['ink', 'sheet', TEXT],
	['ink', 'brass-wash', TEXT],
	['ink', 'brass-fill', TEXT],
	['ink-soft', 'paper', TEXT],
	['ink-soft', 'paper-sunk', TEXT],
	['ink-soft', 'sheet', TEXT],
	['ink-soft', 'brass-wash', TEXT],
	['accent', 'paper', TEXT],
	['accent-ink', 'accent', TEXT],
	['vermilion', 'paper', TEXT],
	['vermilion', 'paper-sunk', TEXT],
	['vermilion', 'brass-wash', TEXT],
	['moss', 'paper', TEXT],
	['brass', 'paper', TEXT],
	['line-strong', 'paper', CONTROL],
	['line-strong', 'paper-sunk', CONTROL],
	['accent', 'sheet', CONTROL],
	['brass', 'paper-sunk', CONTROL],
	['strap-input', 'sheet', CONTROL],
	['strap-regulated', 'sheet', CONTROL],
	['strap-ground', 'sheet', CONTROL]
];

const toOklch = converter('oklch');
const toLab = converter('lab65');

/** 256 steps of the map's scale, with the hue carried along as the map does it. */
function wash(theme: Record<Token, string>) {
	const at = interpolate([theme['wash-low'], theme['wash-high']], 'oklch');
	return Array.from({ length: 256 }, (_, step) => at(step / 255));
}

describe.each(['light', 'dark'] as const)('the %s theme', (name) => {
	const theme = THEMES[name];

	it.each(PAIRS)('%s on %s has a contrast of at least %d', (front, back, least) => {
		expect(wcagContrast(theme[front], theme[back])).toBeGreaterThanOrEqual(least);
	});

	it('washes the map in even steps of lightness that never turn back (UX-37)', () => {
		const lightness = wash(theme).map((colour) => toLab(colour).l);
		const mean = (lightness[255] - lightness[0]) / 255;
		expect(Math.abs(mean)).toBeGreaterThan(0.2);
		for (const [k, l] of lightness.slice(1).entries()) {
			expect((l - lightness[k]) / mean).toBeGreaterThan(0.6);
			expect((l - lightness[k]) / mean).toBeLessThan(1.5);
		}
	});

	it('washes the map in one hue', () => {
		const hue = toOklch(theme['wash-high'])?.h ?? 0;
		for (const colour of wash(theme)) {
			expect(Math.abs((toOklch(colour).h ?? hue) - hue)).toBeLessThan(10);
		}
	});

	it('keeps the ends of the wash apart in grey print (UX-38)', () => {
		expect(wcagContrast(theme['wash-low'], theme['wash-high'])).toBeGreaterThan(7);
	});
});
