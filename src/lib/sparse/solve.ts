import type { Unknowns } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';
import { substituteBackward, substituteForward, unknownsView } from './substitute.ts';

/**
 * Solves A x = b with a kept factor: forward and backward substitution over the panels.
 *
 * @param b right-hand side, length n, unchanged
 * @param x solution, length n, overwritten and returned; may be `b` itself
 */
export function solveWith(
	factor: CholeskyFactor,
	b: Float64Array,
	x: Float64Array = new Float64Array(factor.symbolic.n)
): Float64Array {
	const unknowns = load(factor, b, x);
	substituteForward(factor, unknowns);
	substituteBackward(factor, unknowns);
	return unload(factor, unknowns, x);
}

/** The forward half of `solveWith`: L^-1 P b, in the new numbering. Length n. */
export function forwardWith(factor: CholeskyFactor, b: Float64Array): Float64Array {
	const unknowns = load(factor, b, b);
	substituteForward(factor, unknowns);
	return unknownsView(factor, unknowns.at, 1).slice();
}

/** The backward half of `solveWith`: from what `forwardWith` gave to a new x. */
export function backwardWith(factor: CholeskyFactor, half: Float64Array): Float64Array {
	const unknowns = ownUnknowns(factor);
	unknownsView(factor, unknowns.at, 1).set(half);
	substituteBackward(factor, unknowns);
	return unload(factor, unknowns, new Float64Array(factor.symbolic.n));
}

function ownUnknowns({ space, team }: CholeskyFactor): Unknowns {
	return { at: space.layout.ownY, otherAt: team?.space.otherY ?? 0, lanes: 1 };
}

function load(factor: CholeskyFactor, b: Float64Array, x: Float64Array): Unknowns {
	const { n, perm } = factor.symbolic;
	if (b.length !== n || x.length !== n) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${n} unknowns`);
	}
	const unknowns = ownUnknowns(factor);
	const y = unknownsView(factor, unknowns.at, 1);
	for (let k = 0; k < n; k++) y[k] = b[perm[k]];
	return unknowns;
}

function unload(factor: CholeskyFactor, unknowns: Unknowns, x: Float64Array): Float64Array {
	const { n, perm } = factor.symbolic;
	const y = unknownsView(factor, unknowns.at, 1);
	for (let k = 0; k < n; k++) x[perm[k]] = y[k];
	return x;
}
