import type { SymbolicFactor } from './analyse.ts';
import {
	bindCalls,
	createFactorMemory,
	layOut,
	releaseFactorMemory,
	type FactorMemory,
	type SharedSpace,
	type ThreadSpace
} from './factor-memory.ts';
import { kernelModule, makeCalls, MOST_MEMORY_BYTES, type KernelCall } from './kernels.ts';
import type { SymmetricMatrix } from './matrix.ts';
import type { SecondThread } from './second-thread.ts';
import { splitWork, type Ranges, type WorkSplit } from './work-split.ts';

/** A = P^T L L^T P. */
export interface CholeskyFactor {
	readonly symbolic: SymbolicFactor;
	readonly space: FactorMemory;
	/** The second thread and how the work is shared with it, null without one. */
	readonly team: Team | null;
}

export interface Team {
	readonly thread: SecondThread;
	readonly split: WorkSplit;
	readonly space: SharedSpace;
}

export type FactoriseResult =
	| { readonly status: 'factorised'; readonly factor: CholeskyFactor }
	/**
	 * The matrix is not positive definite: the pivot of this row was zero, negative or no number.
	 * Rounding may leave a tiny positive pivot where a part of a graph has no tie at all, so a
	 * caller that allows such parts looks for them in the graph.
	 */
	| { readonly status: 'not-positive-definite'; readonly row: number }
	/** The factor would not fit; nothing was allocated. */
	| { readonly status: 'too-large'; readonly bytes: number; readonly limitBytes: number };

export interface FactoriseOptions {
	/** Most memory that factor and working space may take together, bytes; at most 4 GB. */
	readonly limitBytes?: number;
	/** Shares the work, which is worth its cost from `SECOND_THREAD_ROWS` on. */
	readonly secondThread?: SecondThread | null;
	/** A factor of the same analysis whose memory is taken over; it must not be used any more. */
	readonly replaces?: CholeskyFactor | null;
}

/** Rows from which a second thread gains more than handing it work costs. */
export const SECOND_THREAD_ROWS = 50_000;
/**
 * Supernodes per kernel call: engines put a faster version of a kernel in place between calls, not
 * within one.
 */
const SUPERNODES_PER_CALL = 256;

/** Memory that a factor and its making take, bytes. */
export function factorBytes(symbolic: SymbolicFactor): number {
	return layOut(symbolic, null).bytes;
}

/**
 * Numeric multifrontal factorisation of a matrix with the analysed pattern. Each front is a panel
 * (the columns eliminated in it) and an update matrix for its parent.
 *
 * @param matrix of the pattern that was analysed; else a RangeError
 */
export function factorise(
	symbolic: SymbolicFactor,
	matrix: SymmetricMatrix,
	options: FactoriseOptions = {}
): FactoriseResult {
	const { limitBytes = MOST_MEMORY_BYTES, secondThread = null, replaces = null } = options;
	const { length } = matrix.value;
	if (matrix.n !== symbolic.n || length !== symbolic.storedEntries) {
		throw new RangeError(
			`a matrix of ${matrix.n} rows and ${length} entries, analysed were ${symbolic.n} and ${symbolic.storedEntries}`
		);
	}
	let factor = replaces?.symbolic === symbolic ? replaces : null;
	if (factor === null) {
		const split = secondThread && splitWork(symbolic);
		const layout = layOut(symbolic, split);
		const most = Math.min(limitBytes, MOST_MEMORY_BYTES);
		if (layout.bytes > most) {
			return { status: 'too-large', bytes: layout.bytes, limitBytes: most };
		}
		const space = createFactorMemory(symbolic, layout);
		const { shared } = layout;
		const team =
			secondThread && split && shared ? { thread: secondThread, split, space: shared } : null;
		factor = { symbolic, space, team };
	}
	const { memory, layout } = factor.space;
	new Float64Array(memory.buffer, layout.values, length).set(matrix.value);
	const failed = runFactorisation(factor);
	if (failed !== -1) {
		releaseFactor(factor);
		return { status: 'not-positive-definite', row: symbolic.perm[failed] };
	}
	return { status: 'factorised', factor };
}

/** Gives a factor's memory back for others: it must not be used any more. */
export function releaseFactor({ space }: CholeskyFactor): void {
	releaseFactorMemory(space);
}

/** -1, or the column at which it failed. */
function runFactorisation({ space, team, symbolic }: CholeskyFactor): number {
	const { layout, kernels } = space;
	const calls = (thread: ThreadSpace, ranges: Ranges) => [
		...bindCalls(layout, thread),
		...factoriseCalls(ranges)
	];
	if (!team) return makeCalls(kernels, calls(layout.own, [0, symbolic.supernodes]));
	const { own, other, top } = team.split;
	const failed = runTogether(space, team, calls(layout.own, own), calls(team.space.other, other));
	return failed === -1 ? makeCalls(kernels, calls(team.space.top, top)) : failed;
}

/** Makes one list of calls here and one on the second thread, and waits for both. */
export function runTogether(
	{ memory, kernels, isShared }: FactorMemory,
	{ thread }: Team,
	own: readonly KernelCall[],
	other: readonly KernelCall[]
): number {
	thread.start({ module: kernelModule(isShared), memory, calls: other });
	const failed = makeCalls(kernels, own);
	const otherFailed = thread.finish() ?? makeCalls(kernels, other);
	return failed === -1 ? otherFailed : failed;
}

function factoriseCalls(ranges: Ranges): KernelCall[] {
	const calls: KernelCall[] = [];
	for (let r = 0; r < ranges.length; r += 2) {
		for (let from = ranges[r]; from < ranges[r + 1]; from += SUPERNODES_PER_CALL) {
			calls.push(['factoriseRange', from, Math.min(from + SUPERNODES_PER_CALL, ranges[r + 1])]);
		}
	}
	return calls;
}
