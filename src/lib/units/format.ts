import { PREFIXED, SYMBOLS, type Unit } from './unit.ts';

/** Prefixes used for printing, from large to small; micro is printed as µ. */
const PRINTED: readonly (readonly [factor: number, prefix: string])[] = [
	[1e9, 'G'],
	[1e6, 'M'],
	[1e3, 'k'],
	[1, ''],
	[1e-3, 'm'],
	[1e-6, 'µ'],
	[1e-9, 'n'],
	[1e-12, 'p']
];

export interface FormatOptions {
	/** Significant digits; default 4. */
	readonly digits?: number;
	/** Power of ten of a prefix that all numbers of a column share, for example 1e-3. */
	readonly factor?: number;
}

/** Digits without a trailing fraction of zeros, with a true minus sign. */
function printNumber(value: number, digits: number): string {
	if (value === 0) return '0';
	const rounded = Number(value.toPrecision(digits));
	const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(Math.abs(rounded))));
	return rounded.toFixed(Math.min(decimals, 12)).replace('-', '−');
}

/** Removes zeros behind the decimal point. */
function trimZeros(text: string): string {
	return text.includes('.') ? text.replace(/\.?0+$/, '') : text;
}

/** A quantity with its unit for people: 0.0123 V is "12.3 mV"; NaN and infinities are a dash. */
export function formatQuantity(value: number, unit: Unit, options: FormatOptions = {}): string {
	if (!Number.isFinite(value)) return '–';
	const digits = options.digits ?? 4;
	const symbol = SYMBOLS[unit];
	if (unit === 'fraction') return `${trimZeros(printNumber(value * 100, digits))} %`;
	if (!PREFIXED.has(unit)) {
		return `${trimZeros(printNumber(value, Math.max(digits, 7)))}${symbol && ` ${symbol}`}`;
	}
	const size = Math.abs(Number(value.toPrecision(digits)));
	const [factor, prefix] =
		PRINTED.find(([one]) => (options.factor ? one === options.factor : size >= one)) ??
		(size === 0 ? [1, ''] : [1e-12, 'p']);
	return `${trimZeros(printNumber(value / factor, digits))} ${prefix}${symbol}`;
}
