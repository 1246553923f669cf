import { describe, expect, it } from 'vitest';
import type { DropMap } from '#lib/results/index.ts';
import { smallPlan } from '../../../../tests/support/editor-driver.ts';
import { ALL_RAILS, dropLimitOf, netsOf, preparePicture } from './map-view.ts';

const mapOf = (...dropV: number[]): DropMap => ({
	columns: dropV.length,
	rows: 1,
	originXNm: 0,
	originYNm: 0,
	cellNm: 1000,
	dropV: Float32Array.from(dropV),
	netDropV: Float32Array.from(dropV),
	groundRiseV: new Float32Array(dropV.length)
});
const wash = new Uint8ClampedArray(768);
const makeImage = () => ({}) as CanvasImageSource;

it('all rails are the regulated ones', () => {
	expect(netsOf(smallPlan(), ALL_RAILS)).toEqual(['vdd']);
	expect(netsOf(smallPlan(), 'vin')).toEqual(['vin']);
});

describe('the limit of what is shown', () => {
	const limits = { dropV: 0.05, overrides: { nets: { vdd: { dropV: 0.03 } } } };

	it('is the one of the net, else that of the plan', () => {
		expect(dropLimitOf(limits, 'vdd', 'dropV')).toBe(0.03);
		expect(dropLimitOf(limits, 'vin', 'dropV')).toBe(0.05);
		expect(dropLimitOf({}, 'vdd', 'dropV')).toBeNull();
	});

	it('holds for what a load sees, not for a part of it', () => {
		expect(dropLimitOf(limits, 'vdd', 'netDropV')).toBeNull();
	});
});

describe('preparePicture', () => {
	it('several nets share one scale that begins at 0', () => {
		const maps = [
			{ net: 'a', map: mapOf(0.01, 0.02) },
			{ net: 'b', map: mapOf(0.04) }
		];
		const { range } = preparePicture({}, maps, 'dropV', wash, makeImage);
		expect(range.min).toBe(0);
		expect(range.max).toBeCloseTo(0.04);
	});

	it('begins below 0 only where the supply is above nominal', () => {
		const maps = [{ net: 'a', map: mapOf(-0.01, 0.02) }];
		expect(preparePicture({}, maps, 'dropV', wash, makeImage).range.min).toBeCloseTo(-0.01);
	});

	it('names each limit once, and draws it where it is passed', () => {
		const maps = [
			{ net: 'a', map: mapOf(0.01, 0.06) },
			{ net: 'b', map: mapOf(0.04) }
		];
		const picture = preparePicture({ dropV: 0.05 }, maps, 'dropV', wash, makeImage);
		expect(picture.limitsV).toEqual([0.05]);
		expect(picture.maps.map(({ contour }) => contour?.length)).toEqual([1, 0]);
	});
});
