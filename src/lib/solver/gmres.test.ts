import { Matrix, solve } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { solveGmres } from './gmres.ts';

/** A nonsymmetric, well-conditioned matrix whose entries are written down, not drawn. */
function sample(order: number): Matrix {
	const matrix = Matrix.zeros(order, order);
	for (let i = 0; i < order; i++) {
		for (let j = 0; j < order; j++) matrix.set(i, j, Math.sin(3 * i + 7 * j + 1) / 4);
		matrix.set(i, i, 5 + (i % 3));
	}
	return matrix;
}

function multiplyBy(matrix: Matrix) {
	return (x: Float64Array, into: Float64Array) => {
		matrix
			.mmul(Matrix.columnVector(x))
			.to1DArray()
			.forEach((value, i) => (into[i] = value));
	};
}

describe('solveGmres', () => {
	it.each([30, 4])('agrees with a dense solve at restart %i', (restart) => {
		const matrix = sample(20);
		const b = Float64Array.from({ length: 20 }, (_, i) => Math.cos(i));
		const x = new Float64Array(20);
		const result = solveGmres(multiplyBy(matrix), b, x, {
			tolerance: 1e-13,
			restart,
			maxIterations: 400
		});
		expect(result.converged).toBe(true);
		const exact = solve(matrix, Matrix.columnVector(b)).to1DArray();
		exact.forEach((value, i) => expect(x[i]).toBeCloseTo(value, 12));
	});

	it('ends within the order of the matrix without restarts', () => {
		const b = Float64Array.from({ length: 12 }, (_, i) => i - 4);
		const result = solveGmres(multiplyBy(sample(12)), b, new Float64Array(12), {
			tolerance: 1e-12,
			restart: 50,
			maxIterations: 50
		});
		expect(result.converged).toBe(true);
		expect(result.iterations).toBeLessThanOrEqual(12);
	});

	it('answers zero for a zero right-hand side', () => {
		const x = Float64Array.from([1, 2]);
		const options = { tolerance: 1e-12, restart: 5, maxIterations: 5 };
		expect(solveGmres(multiplyBy(sample(2)), new Float64Array(2), x, options).converged).toBe(true);
		expect([...x]).toEqual([0, 0]);
	});

	it('says so when it does not converge', () => {
		const singular = new Matrix([
			[1, 1],
			[1, 1]
		]);
		const result = solveGmres(
			multiplyBy(singular),
			Float64Array.from([1, -1]),
			new Float64Array(2),
			{ tolerance: 1e-12, restart: 5, maxIterations: 20 }
		);
		expect(result.converged).toBe(false);
	});
});
