import type { SymmetricMatrix } from './matrix.ts';

/** y = A x. Lengths n; `y` is overwritten and returned. */
export function multiply(
	matrix: SymmetricMatrix,
	x: Float64Array,
	y: Float64Array = new Float64Array(matrix.n)
): Float64Array {
	const { n, rowStart, column, value } = matrix;
	for (let i = 0; i < n; i++) {
		let sum = 0;
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) sum += value[p] * x[column[p]];
		y[i] = sum;
	}
	return y;
}

/** Euclidean norm. */
export function norm2(x: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < x.length; i++) sum += x[i] * x[i];
	return Math.sqrt(sum);
}

/** norm(b - A x) / norm(b), recomputed from the matrix; the plain norm where b is zero. */
export function relativeResidual(
	matrix: SymmetricMatrix,
	x: Float64Array,
	b: Float64Array
): number {
	const r = multiply(matrix, x);
	for (let i = 0; i < r.length; i++) r[i] = b[i] - r[i];
	const scale = norm2(b);
	return scale > 0 ? norm2(r) / scale : norm2(r);
}
