import type { CholeskyFactor } from './factorise.ts';

/**
 * Solves A x = b with a kept factor: forward and backward substitution over the panels.
 *
 * @param b right-hand side, length n, unchanged
 * @param x solution, length n, overwritten and returned; may be `b` itself
 */
export function solveWith(
	{ symbolic, panels }: CholeskyFactor,
	b: Float64Array,
	x: Float64Array = new Float64Array(symbolic.n)
): Float64Array {
	const { n, perm, supernodes, start, rowStart, rows, panelStart } = symbolic;
	if (b.length !== n || x.length !== n) {
		throw new RangeError(`vectors of ${b.length} and ${x.length} for ${n} unknowns`);
	}
	const y = new Float64Array(n);
	for (let k = 0; k < n; k++) y[k] = b[perm[k]];
	for (let s = 0; s < supernodes; s++) {
		const first = start[s];
		const width = start[s + 1] - first;
		const panel = panelStart[s] | 0;
		const rowBase = rowStart[s];
		const height = rowStart[s + 1] - rowBase;
		for (let i = 0; i < height; i++) {
			const row = panel + i * width;
			const stop = i < width ? i : width;
			let sum = 0;
			for (let k = 0; k < stop; k++) sum += panels[row + k] * y[first + k];
			if (i < width) y[first + i] = (y[first + i] - sum) / panels[row + i];
			else y[rows[rowBase + i]] -= sum;
		}
	}
	for (let s = supernodes - 1; s >= 0; s--) {
		const first = start[s];
		const width = start[s + 1] - first;
		const panel = panelStart[s] | 0;
		const rowBase = rowStart[s];
		const height = rowStart[s + 1] - rowBase;
		for (let i = height - 1; i >= 0; i--) {
			const row = panel + i * width;
			let value: number;
			let stop = width;
			if (i < width) {
				value = y[first + i] / panels[row + i];
				y[first + i] = value;
				stop = i;
			} else {
				value = y[rows[rowBase + i]];
			}
			for (let k = 0; k < stop; k++) y[first + k] -= panels[row + k] * value;
		}
	}
	for (let k = 0; k < n; k++) x[perm[k]] = y[k];
	return x;
}
