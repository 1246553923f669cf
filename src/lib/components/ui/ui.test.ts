import { describe, expect, it } from 'vitest';
import { tableCsv, tableTsv } from './csv.ts';
import { cellText, headText, type DataColumn } from './data-column.ts';
import { visibleRange } from './visible-range.ts';

describe('tableCsv', () => {
	it('makes formulas plain and leaves negative numbers numbers (SEC-34)', () => {
		expect(
			tableCsv(
				['name', 'amps'],
				[
					['=1+1', -0.5],
					['-x', 2],
					['a,"b"', null],
					['@sum', Number.NaN]
				]
			)
		).toBe('name,amps\r\n\'=1+1,-0.5\r\n\'-x,2\r\n"a,""b""",\r\n\'@sum,\r\n');
	});
});

describe('tableTsv', () => {
	it('keeps every row on one line and formulas plain', () => {
		expect(
			tableTsv(
				['name', 'mA'],
				[
					['two\nlines', -1],
					['+1', 3]
				]
			)
		).toBe("name\tmA\ntwo lines\t-1\n'+1\t3\n");
	});
});

describe('cellText', () => {
	const column: DataColumn<{ amps: number | null }> = {
		id: 'amps',
		header: 'Current',
		unit: 'mA',
		value: ({ amps }) => amps,
		decimals: 2
	};

	it.each([
		[1.005, '1.00'],
		[-3.456, '−3.46'],
		[-0.001, '0.00'],
		[null, '–'],
		[Infinity, '–']
	])('%d reads %s', (amps, text) => {
		expect(cellText({ amps }, column)).toBe(text);
	});

	it('names the unit in the head', () => {
		expect(headText(column)).toBe('Current (mA)');
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
