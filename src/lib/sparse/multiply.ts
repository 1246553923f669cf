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

/** r = b - A x. Lengths n; `r` is overwritten and returned. */
export function residualOf(
	matrix: SymmetricMatrix,
	x: Float64Array,
	b: Float64Array,
	r: Float64Array = new Float64Array(matrix.n)
): Float64Array {
	multiply(matrix, x, r);
	for (let i = 0; i < r.length; i++) r[i] = b[i] - r[i];
	return r;
}

/** norm(b - A x) / norm(b), recomputed from the matrix; the plain norm where b is zero. */
export function relativeResidual(
	matrix: SymmetricMatrix,
	x: Float64Array,
	b: Float64Array
): number {
	const size = norm2(residualOf(matrix, x, b));
	const scale = norm2(b);
	return scale > 0 ? size / scale : size;
}
