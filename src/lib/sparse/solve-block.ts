import { extendMemory } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';
import { KERNEL_SIZES } from './kernels.ts';
import { solveWith } from './solve.ts';
import {
	substituteBackward,
	substituteForward,
	unknownsView,
	type Unknowns
} from './substitute.ts';

/**
 * Solves A X = B for several right-hand sides. As many as the kernels have lanes pass through the
 * factor at a time, so that its values are read once for all of them.
 *
 * @param b right-hand sides one after another, length n * count, unchanged
 * @param x solutions in the same order, length n * count, overwritten and returned; may be `b`
 */
export function solveBlockWith(
	factor: CholeskyFactor,
	b: Float64Array,
	count: number,
	x: Float64Array = new Float64Array(factor.symbolic.n * count)
): Float64Array {
	const { n, perm } = factor.symbolic;
	if (!Number.isInteger(count) || count < 0 || b.length !== n * count || x.length !== n * count) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${count} times ${n} unknowns`);
	}
	if (count === 0) return x;
	if (count === 1) return solveWith(factor, b, x);
	const { lanes } = KERNEL_SIZES;
	const unknowns = laneUnknowns(factor);
	const y = unknownsView(factor, unknowns.at, lanes);
	for (let first = 0; first < count; first += lanes) {
		const used = Math.min(lanes, count - first);
		// Lanes without a right-hand side solve for zero.
		if (used < lanes) y.fill(0);
		for (let k = 0; k < n; k++) {
			for (let c = 0, from = first * n + perm[k]; c < used; c++, from += n) {
				y[k * lanes + c] = b[from];
			}
		}
		substituteForward(factor, unknowns);
		substituteBackward(factor, unknowns);
		for (let k = 0; k < n; k++) {
			for (let c = 0, to = first * n + perm[k]; c < used; c++, to += n) {
				x[to] = y[k * lanes + c];
			}
		}
	}
	return x;
}

/**
 * The backward half for several right-hand sides: calls `answer` with each one's solution, by rows
 * of the matrix, in a buffer that is used again for the next.
 *
 * @param fill writes the forward half of right-hand side `index` (L^-1 P b, new numbering) into y
 */
export function backwardBlockWith(
	factor: CholeskyFactor,
	count: number,
	fill: (index: number, y: Float64Array) => void,
	answer: (index: number, x: Float64Array) => void
): void {
	const { n, perm } = factor.symbolic;
	const { lanes } = KERNEL_SIZES;
	const unknowns = laneUnknowns(factor);
	const y = unknownsView(factor, unknowns.at, lanes);
	const half = new Float64Array(n);
	for (let first = 0; first < count; first += lanes) {
		const used = Math.min(lanes, count - first);
		if (used < lanes) y.fill(0);
		for (let c = 0; c < used; c++) {
			fill(first + c, half);
			for (let k = 0; k < n; k++) y[k * lanes + c] = half[k];
		}
		substituteBackward(factor, unknowns);
		for (let c = 0; c < used; c++) {
			for (let k = 0; k < n; k++) half[perm[k]] = y[k * lanes + c];
			answer(first + c, half);
		}
	}
}

/** The lanes' unknowns; their space is made when it is first asked for. */
function laneUnknowns({ symbolic, space, team }: CholeskyFactor): Unknowns {
	const bytes = 8 * symbolic.n * KERNEL_SIZES.lanes;
	space.lanes ??= {
		at: extendMemory(space, bytes),
		otherAt: team ? extendMemory(space, bytes) : 0,
		lanes: KERNEL_SIZES.lanes
	};
	return space.lanes;
}
