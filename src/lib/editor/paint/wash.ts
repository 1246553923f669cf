import { clampChroma, converter, interpolate } from 'culori';

/** Steps of the ink wash. */
export const WASH_STEPS = 256;

/**
 * The ink wash as RGB bytes, three per step, from the lowest value to the highest: one hue, evenly
 * spaced in perceived lightness, so that equal steps of drop look equal and grey prints keep order.
 */
export function makeWash(low: string, high: string): Uint8ClampedArray {
	const at = interpolate([low, high], 'oklch');
	const toRgb = converter('rgb');
	const bytes = new Uint8ClampedArray(3 * WASH_STEPS);
	for (let step = 0; step < WASH_STEPS; step++) {
		const colour = toRgb(clampChroma(at(step / (WASH_STEPS - 1)), 'oklch'));
		bytes.set([colour.r * 255, colour.g * 255, colour.b * 255], 3 * step);
	}
	return bytes;
}

/** Step of a value within a range; values beyond it take the end steps. */
export function washStep(value: number, min: number, max: number): number {
	if (max <= min) return 0;
	const share = (value - min) / (max - min);
	return Math.round(Math.min(1, Math.max(0, share)) * (WASH_STEPS - 1));
}
