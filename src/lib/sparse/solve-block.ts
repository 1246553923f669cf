import type { CholeskyFactor } from './factorise.ts';
import { solveWith } from './solve.ts';

/** Right-hand sides taken through the factor together: their sums fill a core's registers. */
const LANES = 8;

/**
 * Solves A X = B for several right-hand sides. Eight at a time pass through the factor, so that its
 * values are read once for all of them.
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
	const { n, perm, largestBelow } = factor.symbolic;
	if (!Number.isInteger(count) || count < 0 || b.length !== n * count || x.length !== n * count) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${count} times ${n} unknowns`);
	}
	if (count === 0) return x;
	if (count === 1) return solveWith(factor, b, x);
	/** Unknown k of lane c at k * LANES + c, new numbering. */
	const y = new Float64Array(n * LANES);
	/** The lanes of the rows below a panel, gathered in the panel's order. */
	const gathered = new Float64Array(largestBelow * LANES);
	for (let first = 0; first < count; first += LANES) {
		const lanes = Math.min(LANES, count - first);
		// Lanes without a right-hand side solve for zero.
		if (lanes < LANES) y.fill(0);
		for (let c = 0; c < lanes; c++) {
			const column = (first + c) * n;
			for (let k = 0; k < n; k++) y[k * LANES + c] = b[column + perm[k]];
		}
		forward(factor, y);
		backward(factor, y, gathered);
		for (let c = 0; c < lanes; c++) {
			const column = (first + c) * n;
			for (let k = 0; k < n; k++) x[column + perm[k]] = y[k * LANES + c];
		}
	}
	return x;
}

/** y = L^-1 y in all lanes. The lanes are written out: an array of sums would live in memory. */
function forward({ symbolic, panels }: CholeskyFactor, y: Float64Array): void {
	const { supernodes, start, rowStart, rows, panelStart } = symbolic;
	for (let s = 0; s < supernodes; s++) {
		const first = start[s] * LANES;
		const width = start[s + 1] - start[s];
		const height = rowStart[s + 1] - rowStart[s];
		let row = panelStart[s] | 0;
		for (let i = 0; i < height; i++, row += width) {
			const stop = i < width ? i : width;
			const t = rows[rowStart[s] + i] * LANES;
			let s0 = y[t];
			let s1 = y[t + 1];
			let s2 = y[t + 2];
			let s3 = y[t + 3];
			let s4 = y[t + 4];
			let s5 = y[t + 5];
			let s6 = y[t + 6];
			let s7 = y[t + 7];
			for (let k = 0, q = first; k < stop; k++, q += LANES) {
				const l = panels[row + k];
				s0 -= l * y[q];
				s1 -= l * y[q + 1];
				s2 -= l * y[q + 2];
				s3 -= l * y[q + 3];
				s4 -= l * y[q + 4];
				s5 -= l * y[q + 5];
				s6 -= l * y[q + 6];
				s7 -= l * y[q + 7];
			}
			const pivot = i < width ? panels[row + i] : 1;
			y[t] = s0 / pivot;
			y[t + 1] = s1 / pivot;
			y[t + 2] = s2 / pivot;
			y[t + 3] = s3 / pivot;
			y[t + 4] = s4 / pivot;
			y[t + 5] = s5 / pivot;
			y[t + 6] = s6 / pivot;
			y[t + 7] = s7 / pivot;
		}
	}
}

/** y = L^-T y in all lanes. */
function backward(
	{ symbolic, panels }: CholeskyFactor,
	y: Float64Array,
	gathered: Float64Array
): void {
	const { supernodes, start, rowStart, rows, panelStart } = symbolic;
	for (let s = supernodes - 1; s >= 0; s--) {
		const first = start[s] * LANES;
		const width = start[s + 1] - start[s];
		const below = rowStart[s + 1] - rowStart[s] - width;
		const panel = panelStart[s] | 0;
		const rowBase = rowStart[s] + width;
		for (let i = 0; i < below; i++) {
			const from = rows[rowBase + i] * LANES;
			for (let c = 0; c < LANES; c++) gathered[i * LANES + c] = y[from + c];
		}
		for (let j = width - 1; j >= 0; j--) {
			const t = first + j * LANES;
			let s0 = y[t];
			let s1 = y[t + 1];
			let s2 = y[t + 2];
			let s3 = y[t + 3];
			let s4 = y[t + 4];
			let s5 = y[t + 5];
			let s6 = y[t + 6];
			let s7 = y[t + 7];
			let entry = panel + j * width + j;
			const pivot = panels[entry];
			for (let i = j + 1, q = t + LANES; i < width; i++, q += LANES) {
				entry += width;
				const l = panels[entry];
				s0 -= l * y[q];
				s1 -= l * y[q + 1];
				s2 -= l * y[q + 2];
				s3 -= l * y[q + 3];
				s4 -= l * y[q + 4];
				s5 -= l * y[q + 5];
				s6 -= l * y[q + 6];
				s7 -= l * y[q + 7];
			}
			for (let i = 0, q = 0; i < below; i++, q += LANES) {
				entry += width;
				const l = panels[entry];
				s0 -= l * gathered[q];
				s1 -= l * gathered[q + 1];
				s2 -= l * gathered[q + 2];
				s3 -= l * gathered[q + 3];
				s4 -= l * gathered[q + 4];
				s5 -= l * gathered[q + 5];
				s6 -= l * gathered[q + 6];
				s7 -= l * gathered[q + 7];
			}
			y[t] = s0 / pivot;
			y[t + 1] = s1 / pivot;
			y[t + 2] = s2 / pivot;
			y[t + 3] = s3 / pivot;
			y[t + 4] = s4 / pivot;
			y[t + 5] = s5 / pivot;
			y[t + 6] = s6 / pivot;
			y[t + 7] = s7 / pivot;
		}
	}
}
