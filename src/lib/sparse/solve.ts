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
	const { symbolic, space, team } = factor;
	const { n, perm, supernodes } = symbolic;
	if (b.length !== n || x.length !== n) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${n} unknowns`);
	}
	const { layout, memory, kernels } = space;
	const y = new Float64Array(memory.buffer, layout.ownY, n);
	for (let k = 0; k < n; k++) y[k] = b[perm[k]];
	if (team) solveTogether(factor, team, y);
	else {
		kernels.forward(0, supernodes, layout.ownY);
		kernels.backward(0, supernodes, layout.ownY);
	}
	for (let k = 0; k < n; k++) x[perm[k]] = y[k];
	return x;
}

/**
 * Each thread has the unknowns of its subtrees and a copy of those above: the two copies' forward
 * parts are added up, the answer above is handed to both.
 */
function solveTogether({ symbolic, space }: CholeskyFactor, team: Team, y: Float64Array): void {
	const { layout, memory, kernels } = space;
	const { own, other, top } = team.split;
	const { ownY } = layout;
	const { otherY } = team.space;
	const z = new Float64Array(memory.buffer, otherY, symbolic.n);
	/** Calls `take` with the columns of every range. */
	const columns = (ranges: Ranges, take: (begin: number, end: number) => void) => {
		for (let r = 0; r < ranges.length; r += 2) {
			take(symbolic.start[ranges[r]], symbolic.start[ranges[r + 1]]);
		}
	};
	const together = (kernel: 'forward' | 'backward') =>
		runTogether(space, team, callsOver(kernel, own, ownY), [
			...bindCalls(layout, team.space.other),
			...callsOver(kernel, other, otherY)
		]);
	columns(other, (begin, end) => z.set(y.subarray(begin, end), begin));
	columns(top, (begin, end) => z.fill(0, begin, end));
	together('forward');
	columns(top, (begin, end) => {
		for (let k = begin; k < end; k++) y[k] += z[k];
	});
	makeCalls(kernels, callsOver('forward', top, ownY));
	makeCalls(kernels, callsOver('backward', top, ownY));
	columns(top, (begin, end) => z.set(y.subarray(begin, end), begin));
	together('backward');
	columns(other, (begin, end) => y.set(z.subarray(begin, end), begin));
}

function callsOver(kernel: 'forward' | 'backward', ranges: Ranges, y: number): KernelCall[] {
	const calls: KernelCall[] = [];
	for (let r = 0; r < ranges.length; r += 2) calls.push([kernel, ranges[r], ranges[r + 1], y]);
	// A parent's unknowns are known before its children's.
	return kernel === 'forward' ? calls : calls.reverse();
}
