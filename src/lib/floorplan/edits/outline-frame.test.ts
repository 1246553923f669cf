import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { OutlineUm } from '../primitives.ts';
import { frameOf, withFrame } from './outline-frame.ts';

const notched: OutlineUm = [
	[1, 2],
	[5, 2],
	[5, 4],
	[3, 4],
	[3, 6],
	[1, 6]
];

describe('withFrame', () => {
	it('moves without changing the shape', () => {
		const moved = withFrame(notched, { xUm: -3.5 });
		expect(frameOf(moved)).toEqual({ xUm: -3.5, yUm: 2, widthUm: 4, heightUm: 4 });
		expect(moved[3]).toEqual([-1.5, 4]);
	});

	it('stretches from the lower left corner', () => {
		expect(withFrame(notched, { widthUm: 8 })).toEqual([
			[1, 2],
			[9, 2],
			[9, 4],
			[5, 4],
			[5, 6],
			[1, 6]
		]);
	});

	it('fills the frame that it is asked for, on the nanometre grid', () => {
		const nm = fc.integer({ min: 1, max: 1_000_000_000 }).map((value) => value / 1000);
		fc.assert(
			fc.property(nm, nm, nm, nm, (xUm, yUm, widthUm, heightUm) => {
				const frame = { xUm, yUm, widthUm, heightUm };
				expect(frameOf(withFrame(notched, frame))).toEqual(frame);
			})
		);
	});
});
