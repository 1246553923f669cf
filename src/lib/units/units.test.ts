import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { formatQuantity, parseQuantity, type Unit } from './index.ts';

describe('parseQuantity', () => {
	it.each<[string, Unit, number]>([
		['0.8', 'V', 0.8],
		['800m', 'V', 0.8],
		['800 mV', 'V', 0.8],
		['  1.5 k ', 'ohm', 1500],
		['1.5 kΩ', 'ohm', 1500],
		['20 mohm', 'ohm', 0.02],
		['2.2u', 'A', 2.2e-6],
		['2.2 µA', 'A', 2.2e-6],
		['1e-3', 'A', 0.001],
		['1.5E2 mV', 'V', 0.15],
		['−3 mV', 'V', -0.003],
		['.5', 'V', 0.5],
		['5.', 'V', 5],
		['2 M', 'Hz', 2e6],
		['1.5 mm', 'um', 1500],
		['250 nm', 'um', 0.25],
		['12.345', 'um', 12.345],
		['12 %', 'fraction', 0.12],
		['0.12', 'fraction', 0.12],
		['85 °C', 'degC', 85],
		['-40', 'degC', -40],
		['0', 'V', 0],
		['0e-400', 'V', 0],
		['+3', 'V', 3],
		['40 nF', 'F', 4e-8]
	])('%j in %s is %d', (text, unit, value) => {
		expect(parseQuantity(text, unit)).toEqual({ ok: true, value });
	});

	it.each<[string, Unit, RegExp]>([
		['', 'V', /enter a number/],
		['1,5 mm', 'um', /point for decimals/],
		['1,000', 'V', /thousands marks/],
		['1 000', 'V', /without gaps/],
		["1'000", 'V', /without gaps/],
		['NaN', 'V', /does not start with a number/],
		['Infinity', 'V', /does not start with a number/],
		['1e999', 'V', /too large/],
		['1e308 k', 'V', /not a unit|too large/],
		['-1e400', 'V', /too large/],
		['1e-400', 'V', /too small/],
		['1’000', 'V', /without gaps/],
		['1\u00a0000', 'V', /without gaps/],
		['1.000,5', 'V', /point for decimals/],
		['1,', 'V', /not a unit/],
		[',5', 'V', /does not start/],
		['0x10', 'V', /not a unit/],
		['1e', 'V', /not a unit/],
		['--1', 'V', /does not start/],
		['٣', 'V', /does not start/],
		['9'.repeat(1000), 'V', /too long/],
		['5 mA', 'V', /not a unit/],
		['5 V', 'um', /not a unit/],
		['5 x', '1', /not a unit/],
		['mV', 'V', /does not start/],
		['1.2.3', 'V', /not a unit/],
		['constructor', 'um', /does not start/],
		['1 toString', 'V', /not a unit/]
	])('refuses %j in %s', (text, unit, reason) => {
		const result = parseQuantity(text, unit);
		expect(result.ok ? '' : result.reason).toMatch(reason);
	});
});

describe('formatQuantity', () => {
	it.each<[number, Unit, string]>([
		[0.0123, 'V', '12.3 mV'],
		[0.8, 'V', '800 mV'],
		[1.25, 'A', '1.25 A'],
		[-0.0005, 'A', '−500 µA'],
		[0.99996, 'V', '1 V'],
		[0, 'V', '0 V'],
		[1500, 'ohm', '1.5 kΩ'],
		[0.1234, 'fraction', '12.34 %'],
		[1200.5, 'um', '1200.5 µm'],
		[85, 'degC', '85 °C'],
		[NaN, 'V', '–']
	])('%d %s is %j', (value, unit, text) => {
		expect(formatQuantity(value, unit)).toBe(text);
	});

	it('what it prints is read back within its digits', () => {
		fc.assert(
			fc.property(fc.double({ min: 1e-11, max: 1e8, noNaN: true }), (value) => {
				const read = parseQuantity(formatQuantity(value, 'A', { digits: 6 }), 'A');
				expect(read.ok && Math.abs(read.value - value) <= 1e-5 * value).toBe(true);
			})
		);
	});
});
