/** The units that quantities are shown and typed in. Values are always in the unit itself. */
export type Unit = 'V' | 'A' | 'ohm' | 'W' | 'F' | 'Hz' | 'um' | 'um2' | 'degC' | 'fraction' | '1';

/** SI prefixes by symbol; u and µ are the same. */
export const PREFIXES: Readonly<Record<string, number>> = {
	f: 1e-15,
	p: 1e-12,
	n: 1e-9,
	u: 1e-6,
	µ: 1e-6,
	μ: 1e-6,
	m: 1e-3,
	k: 1e3,
	M: 1e6,
	G: 1e9,
	T: 1e12
};

/** How each unit is written after a number. */
export const SYMBOLS: Readonly<Record<Unit, string>> = {
	V: 'V',
	A: 'A',
	ohm: 'Ω',
	W: 'W',
	F: 'F',
	Hz: 'Hz',
	um: 'µm',
	um2: 'µm²',
	degC: '°C',
	fraction: '%',
	'1': ''
};

/** Units that take SI prefixes. */
export const PREFIXED: ReadonlySet<Unit> = new Set<Unit>(['V', 'A', 'ohm', 'W', 'F', 'Hz']);
