import { describe, expect, it } from 'vitest';
import { tableCsv } from './csv.ts';
import { visibleRange } from './visible-range.ts';

describe('tableCsv', () => {
	it('makes formulas plain and leaves negative numbers numbers (SEC-34)', () => {
		expect(
			tableCsv(
				['name', 'amps'],
				[
					['=1+1', -0.5],
					['-x', 2],
					['a,"b"', null]
				]
			)
		).toBe('name,amps\r\n\'=1+1,-0.5\r\n\'-x,2\r\n"a,""b""",\r\n');
	});
});

describe('visibleRange', () => {
	it('draws short tables whole', () => {
		expect(visibleRange(200, 500, 100, 28)).toEqual({ first: 0, last: 200, before: 0, after: 0 });
	});

	it('draws what is in view of long ones, and keeps their height', () => {
		const { first, last, before, after } = visibleRange(1000, 2800, 280, 28);
		expect([first, last]).toEqual([88, 122]);
		expect(before + (last - first) * 28 + after).toBe(28_000);
	});
});
