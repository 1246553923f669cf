/**
 * The numeric factorisation and substitution in plain TypeScript: slow and simple, the oracle for the
 * kernels of src/lib/sparse/assembly.
 */
import type { SymbolicFactor, SymmetricMatrix } from '#lib/sparse/index.ts';

/**
 * Panels of L, row-major, at `symbolic.panelStart`; or the row whose pivot is not a positive finite
 * number.
 */
export function factorisePlainly(
	symbolic: SymbolicFactor,
	matrix: SymmetricMatrix
): Float64Array | { row: number } {
	const { supernodes, start, rowStart, rows, panelStart, parent, relative } = symbolic;
	const panels = new Float64Array(symbolic.panelValues);
	/** Update matrix of each supernode, by rows of its rows below. */
	const updates: Float64Array[] = [];
	for (let s = 0; s < supernodes; s++) {
		const width = start[s + 1] - start[s];
		const height = rowStart[s + 1] - rowStart[s];
		const front = new Float64Array(height * height);
		for (let p = symbolic.entryStart[s]; p < symbolic.entryStart[s + 1]; p++) {
			const row = Math.floor(symbolic.entryTo[p] / width);
			front[row * height + (symbolic.entryTo[p] % width)] = matrix.value[symbolic.entryFrom[p]];
		}
		for (let child = 0; child < s; child++) {
			if (parent[child] !== s) continue;
			const first = rowStart[child] + start[child + 1] - start[child];
			const size = rowStart[child + 1] - first;
			for (let i = 0; i < size; i++) {
				for (let j = 0; j <= i; j++) {
					front[relative[first + i] * height + relative[first + j]] += updates[child][i * size + j];
				}
			}
		}
		for (let k = 0; k < width; k++) {
			const pivot = front[k * height + k];
			if (!(pivot > 0 && pivot < Infinity)) return { row: symbolic.perm[start[s] + k] };
			for (let i = k; i < height; i++) front[i * height + k] /= Math.sqrt(pivot);
			for (let i = k + 1; i < height; i++) {
				for (let j = k + 1; j <= i; j++) {
					front[i * height + j] -= front[i * height + k] * front[j * height + k];
				}
			}
		}
		for (let i = 0; i < height; i++) {
			for (let k = 0; k < width && start[s] + k <= rows[rowStart[s] + i]; k++) {
				panels[panelStart[s] + i * width + k] = front[i * height + k];
			}
		}
		const below = height - width;
		const update = new Float64Array(below * below);
		for (let i = 0; i < below; i++) {
			for (let j = 0; j <= i; j++) {
				update[i * below + j] = front[(i + width) * height + j + width];
			}
		}
		updates.push(update);
	}
	return panels;
}

/** The panels of a factor, with zeros in the upper corners that a kernel may have used. */
export function lowerPanels(symbolic: SymbolicFactor, panels: Float64Array): Float64Array {
	const { supernodes, start, panelStart } = symbolic;
	const lower = panels.slice();
	for (let s = 0; s < supernodes; s++) {
		const width = start[s + 1] - start[s];
		for (let i = 0; i < width; i++) {
			for (let k = i + 1; k < width; k++) lower[panelStart[s] + i * width + k] = 0;
		}
	}
	return lower;
}
