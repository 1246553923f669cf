import type { SymbolicFactor } from './analyse.ts';
import { bindCalls } from './factor-memory.ts';
import { runTogether, type CholeskyFactor, type Team } from './factorise.ts';
import { makeCalls, type KernelCall } from './kernels.ts';
import type { Ranges } from './work-split.ts';

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
	const y = unknownsOf(factor, b, x);
	const { n, perm } = factor.symbolic;
	for (let k = 0; k < n; k++) y[k] = b[perm[k]];
	substituteForward(factor, y);
	substituteBackward(factor, y);
	for (let k = 0; k < n; k++) x[perm[k]] = y[k];
	return x;
}

/** The forward half of `solveWith`: y = L^-1 P b, in the new numbering. Length n. */
export function forwardWith(
	factor: CholeskyFactor,
	b: Float64Array,
	half: Float64Array
): Float64Array {
	const y = unknownsOf(factor, b, half);
	const { n, perm } = factor.symbolic;
	for (let k = 0; k < n; k++) y[k] = b[perm[k]];
	substituteForward(factor, y);
	half.set(y);
	return half;
}

/** The backward half of `solveWith`: from what `forwardWith` gave to x. */
export function backwardWith(
	factor: CholeskyFactor,
	half: Float64Array,
	x: Float64Array
): Float64Array {
	const y = unknownsOf(factor, half, x);
	const { n, perm } = factor.symbolic;
	y.set(half);
	substituteBackward(factor, y);
	for (let k = 0; k < n; k++) x[perm[k]] = y[k];
	return x;
}

/** The factor's own unknowns; checks the lengths of what goes in and out. */
function unknownsOf(
	{ symbolic, space }: CholeskyFactor,
	from: Float64Array,
	to: Float64Array
): Float64Array {
	const { n } = symbolic;
	if (from.length !== n || to.length !== n) {
		throw new RangeError(`vectors of ${from.length} and ${to.length} for ${n} unknowns`);
	}
	return new Float64Array(space.memory.buffer, space.layout.ownY, n);
}

/**
 * y = L^-1 y. With a second thread each has the unknowns of its subtrees and a copy of those above:
 * the two copies' shares of those above are added up.
 */
function substituteForward(factor: CholeskyFactor, y: Float64Array): void {
	const { symbolic, space, team } = factor;
	const { kernels, layout } = space;
	if (!team) return kernels.forward(0, symbolic.supernodes, layout.ownY);
	const { other, top } = team.split;
	const z = new Float64Array(space.memory.buffer, team.space.otherY, symbolic.n);
	eachColumns(symbolic, other, (begin, end) => z.set(y.subarray(begin, end), begin));
	eachColumns(symbolic, top, (begin, end) => z.fill(0, begin, end));
	substituteTogether(factor, team, 'forward');
	eachColumns(symbolic, top, (begin, end) => {
		for (let k = begin; k < end; k++) y[k] += z[k];
	});
	makeCalls(kernels, callsOver('forward', top, layout.ownY));
	// What the second thread found of its own unknowns.
	eachColumns(symbolic, other, (begin, end) => y.set(z.subarray(begin, end), begin));
}

/** y = L^-T y. The answer above is handed to both threads. */
function substituteBackward(factor: CholeskyFactor, y: Float64Array): void {
	const { symbolic, space, team } = factor;
	const { kernels, layout } = space;
	if (!team) return kernels.backward(0, symbolic.supernodes, layout.ownY);
	const { other, top } = team.split;
	const z = new Float64Array(space.memory.buffer, team.space.otherY, symbolic.n);
	makeCalls(kernels, callsOver('backward', top, layout.ownY));
	for (const ranges of [top, other]) {
		eachColumns(symbolic, ranges, (begin, end) => z.set(y.subarray(begin, end), begin));
	}
	substituteTogether(factor, team, 'backward');
	eachColumns(symbolic, other, (begin, end) => y.set(z.subarray(begin, end), begin));
}

/** Calls `take` with the columns of every range. */
function eachColumns(
	{ start }: SymbolicFactor,
	ranges: Ranges,
	take: (begin: number, end: number) => void
): void {
	for (let r = 0; r < ranges.length; r += 2) take(start[ranges[r]], start[ranges[r + 1]]);
}

function substituteTogether(
	{ space }: CholeskyFactor,
	team: Team,
	kernel: 'forward' | 'backward'
): void {
	const { layout } = space;
	runTogether(space, team, callsOver(kernel, team.split.own, layout.ownY), [
		...bindCalls(layout, team.space.other),
		...callsOver(kernel, team.split.other, team.space.otherY)
	]);
}

function callsOver(kernel: 'forward' | 'backward', ranges: Ranges, y: number): KernelCall[] {
	const calls: KernelCall[] = [];
	for (let r = 0; r < ranges.length; r += 2) calls.push([kernel, ranges[r], ranges[r + 1], y]);
	// A parent's unknowns are known before its children's.
	return kernel === 'forward' ? calls : calls.reverse();
}
