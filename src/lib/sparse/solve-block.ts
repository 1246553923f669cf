import { extendMemory, type Unknowns } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';
import { KERNEL_SIZES } from './kernels.ts';
import { solveWith } from './solve.ts';
import { substituteBackward, substituteForward, unknownsView } from './substitute.ts';

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
		const block = { from: first * n, used };
		// Lanes without a right-hand side solve for zero.
		if (used < lanes) y.fill(0);
		interleave(b, y, perm, block);
		substituteForward(factor, unknowns);
		substituteBackward(factor, unknowns);
		separate(y, x, perm, block);
	}
	return x;
}

/** Many right-hand sides that have nearly everything in common. All vectors in the new numbering. */
export interface RelatedSides {
	readonly count: number;
	/** P b, or where `isForwardDone` its forward half L^-1 P b. Length n. */
	readonly common: Float64Array;
	readonly isForwardDone: boolean;
	/** Adds what right-hand side `index` has more to its lane: unknown k at y[k * lanes + lane]. */
	change(index: number, y: Float64Array, lanes: number, lane: number): void;
	/** Takes its solution, by rows of the matrix, in a buffer that is used again. */
	answer(index: number, x: Float64Array): void;
}

/** Solves for right-hand sides that have nearly everything in common, some at a time. */
export function solveRelated(factor: CholeskyFactor, sides: RelatedSides): void {
	const { n, perm } = factor.symbolic;
	const { lanes } = KERNEL_SIZES;
	const { count, common } = sides;
	const unknowns = laneUnknowns(factor);
	const y = unknownsView(factor, unknowns.at, lanes);
	/** Solutions of the lanes one after another. */
	const columns = new Float64Array(n * lanes);
	for (let first = 0; first < count; first += lanes) {
		const used = Math.min(lanes, count - first);
		for (let k = 0, at = 0; k < n; k++) {
			for (const end = at + lanes; at < end; at++) y[at] = common[k];
		}
		for (let c = 0; c < used; c++) sides.change(first + c, y, lanes, c);
		if (!sides.isForwardDone) substituteForward(factor, unknowns);
		substituteBackward(factor, unknowns);
		separate(y, columns, perm, { from: 0, used });
		for (let c = 0; c < used; c++) sides.answer(first + c, columns.subarray(c * n, (c + 1) * n));
	}
}

/** Lanes in use, and where the first one's column begins. */
interface LaneBlock {
	readonly from: number;
	readonly used: number;
}

/** Columns one after another -> lanes side by side; row k of y is row perm[k] of the columns. */
function interleave(
	columns: Float64Array,
	y: Float64Array,
	perm: Int32Array,
	{ from, used }: LaneBlock
): void {
	const { lanes } = KERNEL_SIZES;
	const n = y.length / lanes;
	for (let k = 0; k < n; k++) {
		let at = from + perm[k];
		for (let c = 0; c < used; c++, at += n) y[k * lanes + c] = columns[at];
	}
}

/** The way back. */
function separate(
	y: Float64Array,
	columns: Float64Array,
	perm: Int32Array,
	{ from, used }: LaneBlock
): void {
	const { lanes } = KERNEL_SIZES;
	const n = y.length / lanes;
	for (let k = 0; k < n; k++) {
		let at = from + perm[k];
		for (let c = 0; c < used; c++, at += n) columns[at] = y[k * lanes + c];
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
