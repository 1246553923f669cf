import { describe, expect, it } from 'vitest';
import { smallPlan } from '../../../../tests/support/editor-driver.ts';
import { describeReading, describeSelection } from './describe.ts';

const plan = smallPlan();
const noResults = new Map();

describe('describeSelection', () => {
	it.each([
		['regulators', 'R1', 'Selected: regulator R1, weir on vdd, at x 100 µm, y 100 µm.'],
		['regulators', 'F', 'Selected: regulator F, weir on vdd, at x 400 µm, y 100 µm, fixed.'],
		['blocks', 'cpu', 'Selected: block cpu on vdd.'],
		['feeds', 'B1', 'Selected: bump B1 of vin.'],
		['keepouts', 'quiet', 'Selected: keep-out quiet.']
	] as const)('%s %s', (list, id, words) => {
		expect(describeSelection(plan, [{ list, id }], noResults)).toBe(words);
	});

	it('says how a regulator works where that is known', () => {
		const results = new Map([
			[
				'R1',
				{
					id: 'R1',
					amps: 0.025,
					loadFraction: 0.5,
					state: 'regulating' as const,
					setV: 1.2,
					outV: 1.19,
					inV: 1.5,
					gndV: 0,
					headroomV: 0.2,
					lossW: 0.01
				}
			]
		]);
		const words = describeSelection(plan, [{ list: 'regulators', id: 'R1' }], results);
		expect(words).toContain('regulating, 50 % of its rating');
	});

	it('counts many, and says when there is nothing', () => {
		expect(describeSelection(plan, [], noResults)).toBe('Nothing selected.');
		const two = [
			{ list: 'regulators', id: 'R1' },
			{ list: 'blocks', id: 'cpu' }
		] as const;
		expect(describeSelection(plan, two, noResults)).toBe('2 items selected.');
	});
});

describe('describeReading', () => {
	it('place, value with unit, share of the limit, nearest thing', () => {
		const parts = describeReading({
			xUm: 12.34,
			yUm: 5,
			value: { net: 'vdd', volts: 0.0123, share: 0.246 },
			nearest: { key: 'regulators:R1', distanceUm: 3.21 }
		});
		expect(parts).toEqual([
			'x 12.3 µm, y 5.0 µm',
			'vdd 12.3 mV',
			'24.6 % of the limit',
			'3.2 µm from R1'
		]);
	});

	it('without a rail, a limit or a thing near by it says less', () => {
		expect(describeReading({ xUm: 0, yUm: 0, value: null, nearest: null })).toHaveLength(1);
		const value = { net: 'vdd', volts: 0.001, share: null };
		const nearest = { key: 'blocks:cpu', distanceUm: 0 } as const;
		expect(describeReading({ xUm: 0, yUm: 0, value, nearest }).slice(1)).toEqual([
			'vdd 1 mV',
			'in cpu'
		]);
	});
});
