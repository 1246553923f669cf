import { PREFIXED, PREFIXES, type Unit } from './unit.ts';

export type QuantityResult =
	{ readonly ok: true; readonly value: number } | { readonly ok: false; readonly reason: string };

const NUMBER = /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?/;

/** No quantity needs more; messages repeat what was typed. */
const MOST_CHARACTERS = 60;

/** Factors of length units to micrometres. */
const LENGTHS: Readonly<Record<string, number>> = {
	'': 1,
	nm: 1e-3,
	um: 1,
	µm: 1,
	μm: 1,
	mm: 1e3,
	cm: 1e4
};

/** Spellings of the units that take prefixes. */
const SPELLINGS: Readonly<Partial<Record<Unit, readonly string[]>>> = {
	V: ['V'],
	A: ['A'],
	ohm: ['Ω', 'Ω', 'ohm', 'Ohm', 'R'],
	W: ['W'],
	F: ['F'],
	Hz: ['Hz']
};

function refuse(reason: string): QuantityResult {
	return { ok: false, reason };
}

/** Factor of what stands after the number, or undefined where it is no spelling of the unit. */
function suffixFactor(suffix: string, unit: Unit): number | undefined {
	switch (unit) {
		case 'um':
			return Object.hasOwn(LENGTHS, suffix) ? LENGTHS[suffix] : undefined;
		case 'um2':
			return ['', 'um2', 'um²', 'µm²', 'μm²'].includes(suffix) ? 1 : undefined;
		case 'degC':
			return ['', 'C', '°C', 'degC'].includes(suffix) ? 1 : undefined;
		case 'fraction':
			return suffix === '' ? 1 : suffix === '%' ? 0.01 : undefined;
		case '1':
			return suffix === '' ? 1 : undefined;
		default: {
			const spelling = SPELLINGS[unit]?.find((one) => suffix.endsWith(one));
			const prefix = spelling ? suffix.slice(0, -spelling.length) : suffix;
			if (prefix === '') return 1;
			return PREFIXED.has(unit) && Object.hasOwn(PREFIXES, prefix) ? PREFIXES[prefix] : undefined;
		}
	}
}

/**
 * Reads what a person typed as a quantity: "0.8", "800m", "800 mV", "1.5e-3", "12 %". The value is
 * in the unit itself (um for lengths, a fraction for "%"). What could be read in two ways is
 * refused with the reason, never cut short.
 */
export function parseQuantity(text: string, unit: Unit): QuantityResult {
	const trimmed = text.trim().replace(/[−–]/g, '-');
	if (trimmed === '') return refuse('enter a number');
	if (trimmed.length > MOST_CHARACTERS) return refuse('the text is too long for a number');
	if (/\d,\d/.test(trimmed)) return refuse('use a point for decimals and no thousands marks');
	if (/\d[\s'’_]\d/.test(trimmed)) return refuse('write the digits without gaps');
	const number = NUMBER.exec(trimmed)?.[0];
	if (!number) return refuse(`"${trimmed}" does not start with a number`);
	const suffix = trimmed.slice(number.length).trim();
	const factor = suffixFactor(suffix, unit);
	if (factor === undefined) return refuse(`"${suffix}" is not a unit that fits here`);
	const value = scale(number, factor);
	if (!Number.isFinite(value)) return refuse('the number is too large');
	if (value === 0 && /[1-9]/.test(number.split(/e/i)[0])) return refuse('the number is too small');
	return { ok: true, value };
}

/** number * factor, moved in decimal so that "800 m" is exactly the double nearest 0.8. */
function scale(number: string, factor: number): number {
	const exponent = Math.round(Math.log10(factor));
	const [mantissa, power = '0'] = number.toLowerCase().split('e');
	return Number(`${mantissa}e${Number(power) + exponent}`);
}
