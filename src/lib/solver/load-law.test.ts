import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { loadCurrent, loadSlope } from './load-law.ts';

describe('loadCurrent', () => {
	it.each([
		[0, 0.3, 2],
		[1, 0.5, 1],
		[-1, 0.5, 4],
		[2, 0.5, 0.5],
		// Below a tenth of nominal: linear to zero from where the law stands there.
		[0, 0.05, 1],
		[1, 0.05, 0.1],
		[-1, 0.05, 10],
		[0, 0, 0],
		[0, -0.05, -1]
	])('exponent %d at %d of nominal draws %d A of 2 A', (exponent, ratio, amps) => {
		expect(loadCurrent(2, ratio * 1.2, 1.2, exponent)).toBeCloseTo(amps, 12);
	});

	it('has no jump at a tenth of nominal', () => {
		for (const exponent of [-2, -1, 0, 0.5, 1, 3]) {
			const below = loadCurrent(2, 0.12 * (1 - 1e-12), 1.2, exponent);
			expect(below / loadCurrent(2, 0.12, 1.2, exponent)).toBeCloseTo(1, 9);
		}
	});

	it('loadSlope is its derivative', () => {
		fc.assert(
			fc.property(
				fc.double({ min: 0.02, max: 1.5, noNaN: true }),
				fc.constantFrom(-2, -1, 0, 0.5, 1, 3),
				(seenV, exponent) => {
					fc.pre(Math.abs(seenV - 0.12) > 1e-3);
					const h = 1e-6;
					const quotient =
						(loadCurrent(2, seenV + h, 1.2, exponent) - loadCurrent(2, seenV - h, 1.2, exponent)) /
						(2 * h);
					const slope = loadSlope(2, seenV, 1.2, exponent);
					expect(Math.abs(slope - quotient)).toBeLessThan(1e-5 * (1 + Math.abs(slope)));
				}
			)
		);
	});
});
