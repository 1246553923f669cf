import { describe, expect, it } from 'vitest';
import { placeWords, valueWords } from './conflict-text.ts';

const changed = { reason: 'changed' } as const;

describe('conflicts in words', () => {
	it.each([
		[
			{ ...changed, list: 'regulators', id: 'R1', field: 'offsetV' } as const,
			0.002,
			'regulator R1, offset',
			'2 mV'
		],
		[
			{ ...changed, list: 'feeds', id: 'b.3', field: 'seriesOhm' } as const,
			0.05,
			'bump b.3, series',
			'50 mΩ'
		],
		[
			{ ...changed, list: 'straps', id: 's', field: 'pitchUm' } as const,
			60,
			'strap pattern s, pitch',
			'60 µm'
		],
		[
			{ ...changed, list: 'nets', id: 'vdd', field: 'volts' } as const,
			1.2,
			'net vdd, volts',
			'1.2 V'
		],
		[
			{ ...changed, list: 'regulators', id: 'R1', field: 'enabled' } as const,
			false,
			'regulator R1, enabled',
			'no'
		],
		[{ ...changed, property: 'limits' } as const, { dropV: 0.06 }, 'limits', '{"dropV":0.06}'],
		[{ reason: 'gone', list: 'blocks', id: 'b' } as const, undefined, 'block b', 'removed']
	])('%j', (place, value, where, what) => {
		expect(placeWords(place)).toBe(where);
		expect(valueWords(place, value)).toBe(what);
	});

	it('cuts long values', () => {
		expect(valueWords(changed, 'x'.repeat(200))).toHaveLength(80);
	});
});
