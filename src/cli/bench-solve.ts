import {
	analyse,
	factorise,
	orderMinimumDegree,
	orderNestedDissection,
	SECOND_THREAD_ROWS,
	solveWith,
	type CholeskyFactor,
	type SecondThread
} from '#lib/sparse/index.ts';
import { seconds, type System } from './bench-system.ts';

/** Seconds of each phase of a solve, from the matrix to its answer. */
export interface SolveSeconds {
	readonly analyse: number;
	readonly factor: number;
	readonly solve: number;
}

export interface Solved {
	readonly factor: CholeskyFactor;
	readonly solution: Float64Array;
	readonly seconds: SolveSeconds;
	readonly threads: number;
	/** Name of the method by its elimination order. */
	readonly method: string;
}

function megabytes(bytes: number): string {
	return `${Math.ceil(bytes / 2 ** 20)} MB`;
}

/** Solves a system from its matrix to its answer; a text where it cannot be solved. */
export function solveSystem(
	{ matrix, b, places }: System,
	secondThread: SecondThread | null
): Solved | string {
	const begin = seconds();
	const order = places
		? orderNestedDissection(matrix, places.x, places.y)
		: orderMinimumDegree(matrix);
	const symbolic = analyse(matrix, order);
	const analysed = seconds();
	const thread = matrix.n >= SECOND_THREAD_ROWS ? secondThread : null;
	const result = factorise(symbolic, matrix, {
		limitBytes: process.availableMemory(),
		secondThread: thread
	});
	const factored = seconds();
	if (result.status === 'not-positive-definite') {
		return `the matrix is not positive definite at row ${result.row + 1} (expected a symmetric positive definite one)`;
	}
	if (result.status === 'too-large') {
		return `its factor takes ${megabytes(result.bytes)} (expected at most the ${megabytes(result.limitBytes)} that there is room for)`;
	}
	const solution = solveWith(result.factor, b);
	const solved = seconds();
	return {
		factor: result.factor,
		solution,
		seconds: { analyse: analysed - begin, factor: factored - analysed, solve: solved - factored },
		threads: thread ? 2 : 1,
		method: `multifrontal Cholesky on ${places ? 'nested dissection' : 'minimum degree'}, WebAssembly kernels`
	};
}
