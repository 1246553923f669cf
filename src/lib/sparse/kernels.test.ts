import fc from 'fast-check';
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { factorisePanel, subtractProduct } from './kernels.ts';

/** A well-conditioned panel of a known factor: A = L L^T over all rows, first columns only. */
function knownPanel(width: number, below: number, seed: number) {
	const height = width + below;
	const factor = Matrix.zeros(height, width);
	for (let i = 0; i < height; i++) {
		for (let j = 0; j <= Math.min(i, width - 1); j++) {
			factor.set(i, j, i === j ? 2 + ((i + seed) % 3) : Math.sin(seed + 7 * i + 3 * j) / width);
		}
	}
	return { factor, product: factor.mmul(factor.transpose()) };
}

describe('dense kernels', () => {
	it('a panel made from a known factor gives that factor, at any width and offset', () => {
		fc.assert(
			fc.property(
				fc.integer({ min: 1, max: 80 }),
				fc.integer({ min: 0, max: 9 }),
				fc.nat(50),
				(width, below, offset) => {
					const { factor, product } = knownPanel(width, below, offset);
					const height = width + below;
					const panel = new Float64Array(offset + height * width + 5).fill(-7);
					for (let i = 0; i < height; i++) {
						for (let j = 0; j < width; j++) panel[offset + i * width + j] = product.get(i, j);
					}
					expect(factorisePanel(panel, offset, width, height)).toBe(-1);
					for (let i = 0; i < height; i++) {
						for (let j = 0; j <= Math.min(i, width - 1); j++) {
							expect(panel[offset + i * width + j]).toBeCloseTo(factor.get(i, j), 12);
						}
					}
					// Nothing is written before or after the panel.
					expect(panel.subarray(0, offset).every((value) => value === -7)).toBe(true);
					expect(panel.subarray(offset + height * width).every((value) => value === -7)).toBe(true);
				}
			)
		);
	});

	it.each([
		[0, 0],
		[3, -1],
		[40, NaN],
		[49, Infinity]
	])('names column %i, whose pivot becomes %d', (column, pivot) => {
		const width = 50;
		const panel = new Float64Array(width * width);
		for (let i = 0; i < width; i++) panel[i * width + i] = i === column ? pivot : 1;
		expect(factorisePanel(panel, 0, width, width)).toBe(column);
	});

	it('subtracts B D^T on and below the diagonal', () => {
		fc.assert(
			fc.property(
				fc.integer({ min: 1, max: 14 }),
				fc.integer({ min: 1, max: 14 }),
				fc.integer({ min: 0, max: 9 }),
				(rows, most, depth) => {
					const columns = Math.min(rows, most);
					const source = new Matrix(
						Array.from({ length: rows }, (_, i) =>
							Array.from({ length: depth + 1 }, (_, k) => Math.cos(5 * i + k))
						)
					);
					const panel = Float64Array.from(source.to1DArray());
					const target = new Float64Array(rows * columns).fill(1);
					subtractProduct(target, 0, columns, panel, 0, depth + 1, rows, columns, depth);
					for (let i = 0; i < rows; i++) {
						for (let j = 0; j <= Math.min(i, columns - 1); j++) {
							let expected = 1;
							for (let k = 0; k < depth; k++) expected -= source.get(i, k) * source.get(j, k);
							expect(target[i * columns + j]).toBeCloseTo(expected, 13);
						}
					}
				}
			)
		);
	});
});
