import type { CholeskyFactor } from './factorise.ts';
import type { SymmetricMatrix } from './matrix.ts';
import { norm2, residualOf } from './multiply.ts';
import { solveWith } from './solve.ts';

export interface Refinement {
	/** Corrections that were kept. */
	readonly steps: number;
	/** norm(b - A x) / norm(b) of the answer; the plain norm where b is zero. */
	readonly residual: number;
}

/** A correction counts only where it makes the residual at least this much smaller. */
const LEAST_GAIN = 2;

/**
 * Iterative refinement (J. H. Wilkinson, Rounding Errors in Algebraic Processes, 1963): corrects `x`
 * by the factor's answer to its residual, until a step no longer halves the residual or `maxSteps`
 * are done. The answer is never worse than it was. The factor may be that of a nearby matrix.
 *
 * @param x solution, length n, improved in place
 */
export function refine(
	matrix: SymmetricMatrix,
	factor: CholeskyFactor,
	b: Float64Array,
	x: Float64Array,
	maxSteps = 2
): Refinement {
	const { n } = matrix;
	const residual = residualOf(matrix, x, b);
	const correction = new Float64Array(n);
	const tried = new Float64Array(n);
	let size = norm2(residual);
	let steps = 0;
	while (steps < maxSteps && size > 0) {
		solveWith(factor, residual, correction);
		for (let i = 0; i < n; i++) tried[i] = x[i] + correction[i];
		const newSize = norm2(residualOf(matrix, tried, b, residual));
		if (!(newSize * LEAST_GAIN <= size)) break;
		x.set(tried);
		size = newSize;
		steps++;
	}
	const scale = norm2(b);
	return { steps, residual: scale > 0 ? size / scale : size };
}
