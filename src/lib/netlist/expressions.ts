/** Pieces of expressions that regulators, loops and loads share. */

/**
 * Slope of a characteristic beyond a bound, ohm or siemens. It stands for a vertical line: a unit
 * that is held 10 mV away from its law passes its bound by 1 nA.
 */
export const WALL = 1e7;

/** The voltage of a node against a reference; ideal and quiet ground are node 0. */
export function voltageOf(node: string, reference: string): string {
	return reference === '0' ? `v(${node})` : `v(${node},${reference})`;
}

/** The name of a node; -1, an ideal ground or input, is node 0. */
export function nameOf(names: readonly string[], node: number): string {
	return node < 0 ? '0' : names[node];
}

/**
 * The steep wall beyond a bound: 0 within it and on the bound itself. The tie matters, since a
 * simulator starts on it, with no current, and orders its equations by the slopes that it finds.
 */
export function beyond(excess: string): string {
	return `${WALL}*((${excess})>0?(${excess}):0)`;
}

/**
 * A law with another expression for the very first step of a simulator, in which every unknown is
 * exactly 0. No answer has an exact 0 there, so the law itself is unaltered.
 */
export function startingFrom(unknown: string, start: string | null, law: string): string {
	return start === null ? law : `(${unknown}==0?(${start}):(${law}))`;
}
