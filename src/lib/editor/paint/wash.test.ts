import { converter, wcagContrast } from 'culori';
import { describe, expect, it } from 'vitest';
import { THEMES } from '../../../../tailwind.config.ts';
import { makeWash, WASH_STEPS, washStep } from './wash.ts';

const toLab = converter('lab65');
const toOklch = converter('oklch');

function stepsOf(theme: 'light' | 'dark') {
	const wash = makeWash(THEMES[theme]['wash-low'], THEMES[theme]['wash-high']);
	return Array.from({ length: WASH_STEPS }, (_, step) => ({
		mode: 'rgb' as const,
		r: wash[3 * step] / 255,
		g: wash[3 * step + 1] / 255,
		b: wash[3 * step + 2] / 255
	}));
}

describe.each(['light', 'dark'] as const)('the ink wash of the %s theme', (theme) => {
	const steps = stepsOf(theme);

	it('goes one way in lightness, in CIE L* too', () => {
		const lightness = steps.map((colour) => toLab(colour).l);
		const sign = Math.sign(lightness[WASH_STEPS - 1] - lightness[0]);
		for (let step = 8; step < WASH_STEPS; step++) {
			// Over eight steps: single ones are rounded to whole bytes.
			expect(sign * (lightness[step] - lightness[step - 8])).toBeGreaterThan(0);
		}
	});

	it('is evenly spaced in perceived lightness', () => {
		const lightness = steps.map((colour) => toOklch(colour).l);
		const whole = lightness[WASH_STEPS - 1] - lightness[0];
		lightness.forEach((value, step) => {
			const even = lightness[0] + (whole * step) / (WASH_STEPS - 1);
			expect(Math.abs(value - even)).toBeLessThan(0.01);
		});
	});

	it('spans most of the way from paper to ink', () => {
		const span = toLab(steps[WASH_STEPS - 1]).l - toLab(steps[0]).l;
		expect(Math.abs(span)).toBeGreaterThan(50);
	});

	it('is one hue where it has a colour at all', () => {
		const hues = steps.map((colour) => toOklch(colour)).filter(({ c }) => c > 0.05);
		for (const { h } of hues) expect(Math.abs((h ?? 0) - 281)).toBeLessThan(8);
	});

	it('of ink and paper, marks and the limit, one stands out by 3:1 from every step', () => {
		const { ink, paper } = THEMES[theme];
		for (const colour of steps) {
			const best = Math.max(wcagContrast(ink, colour), wcagContrast(paper, colour));
			expect(best).toBeGreaterThanOrEqual(3);
		}
	});
});

describe('washStep', () => {
	it.each([
		[0, 0],
		[0.05, 255],
		[0.025, 128],
		[-1, 0],
		[7, 255]
	])('%s V of 0 to 50 mV is step %s', (value, step) => {
		expect(washStep(value, 0, 0.05)).toBe(step);
	});

	it('a map of one value has the lowest step', () => {
		expect(washStep(3, 3, 3)).toBe(0);
	});
});
