import type { CholeskyFactor } from './factorise.ts';
import { extendMemory } from './factor-memory.ts';
import { KERNEL_SIZES } from './kernels.ts';
import { solveWith } from './solve.ts';

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
	const { n, perm, supernodes } = factor.symbolic;
	if (!Number.isInteger(count) || count < 0 || b.length !== n * count || x.length !== n * count) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${count} times ${n} unknowns`);
	}
	if (count === 0) return x;
	if (count === 1) return solveWith(factor, b, x);
	const { kernels } = factor.space;
	const { lanes: LANES } = KERNEL_SIZES;
	const { at, y } = laneSpace(factor);
	for (let first = 0; first < count; first += LANES) {
		const lanes = Math.min(LANES, count - first);
		// Lanes without a right-hand side solve for zero.
		if (lanes < LANES) y.fill(0);
		for (let c = 0; c < lanes; c++) {
			const column = (first + c) * n;
			for (let k = 0; k < n; k++) y[k * LANES + c] = b[column + perm[k]];
		}
		kernels.forwardLanes(0, supernodes, at);
		kernels.backwardLanes(0, supernodes, at);
		for (let c = 0; c < lanes; c++) {
			const column = (first + c) * n;
			for (let k = 0; k < n; k++) x[column + perm[k]] = y[k * LANES + c];
		}
	}
	return x;
}

/** Space for the lanes, n * lanes doubles; made when it is first asked for. */
function laneSpace({ symbolic, space }: CholeskyFactor): { at: number; y: Float64Array } {
	const values = symbolic.n * KERNEL_SIZES.lanes;
	if (space.lanesAt === 0) space.lanesAt = extendMemory(space, 8 * values);
	return {
		at: space.lanesAt,
		y: new Float64Array(space.memory.buffer, space.lanesAt, values)
	};
}
