import { extendMemory } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';

/** Entries of the inverse between a few rows, the ports. */
export interface PortMatrix {
	/** Entry of A^-1 between ports a and b, indices into the rows that were given. */
	at(a: number, b: number): number;
	/** All entries by rows, symmetric. Length ports * ports. */
	all(): Float64Array;
}

/**
 * The inverse between the given rows of the matrix, entry by entry as it is asked for. With
 * w = L^-1 e of each port, which is nonzero only on the way from its supernode to the root, an entry
 * is the dot product of two of them over the common end of their ways (T. A. Davis, Direct Methods
 * for Sparse Linear Systems, 2006, chapter 3 for the sparse triangular solve).
 *
 * @param rows of the matrix, each any number of times
 */
export function portMatrix(factor: CholeskyFactor, rows: ArrayLike<number>): PortMatrix {
	const { symbolic, space } = factor;
	const { n, iperm, start, parent, supernodes } = symbolic;
	const { kernels, layout } = space;
	const count = rows.length;
	const supernode = Int32Array.from(rows, (row) => supernodeOf(start, supernodes, iperm[row]));
	/** Columns on the way of each supernode that a port needs, itself included, from the root down. */
	const lengths = new Map<number, number>();
	const lengthOf = (s: number): number => {
		const known = lengths.get(s);
		if (known !== undefined) return known;
		const above = parent[s] === -1 ? 0 : lengthOf(parent[s]);
		lengths.set(s, above + start[s + 1] - start[s]);
		return above + start[s + 1] - start[s];
	};
	let values = 0;
	const offset = Float64Array.from(supernode, (s) => {
		const from = values;
		values += lengthOf(s);
		return from;
	});
	const vectorsAt = extendMemory(space, 8 * values);
	const vectors = new Float64Array(space.memory.buffer, vectorsAt, values);
	const y = new Float64Array(space.memory.buffer, layout.ownY, n);
	y.fill(0);
	for (let p = 0; p < count; p++) {
		y[iperm[rows[p]]] = 1;
		kernels.forwardPath(supernode[p], layout.ownY);
		for (let s = supernode[p]; s !== -1; s = parent[s]) {
			const width = start[s + 1] - start[s];
			const own = y.subarray(start[s], start[s + 1]);
			vectors.set(own, offset[p] + lengthOf(s) - width);
			own.fill(0);
		}
	}
	const known = new Float64Array(count * count).fill(NaN);

	function at(a: number, b: number): number {
		const kept = known[a * count + b];
		if (!Number.isNaN(kept)) return kept;
		const common = meeting(parent, supernode[a], supernode[b]);
		const value =
			common === -1
				? 0
				: kernels.dotProduct(
						vectorsAt + 8 * offset[a],
						vectorsAt + 8 * offset[b],
						lengthOf(common)
					);
		known[a * count + b] = value;
		known[b * count + a] = value;
		return value;
	}

	return {
		at,
		all() {
			for (let a = 0; a < count; a++) for (let b = 0; b <= a; b++) at(a, b);
			return known;
		}
	};
}

/** The supernode that a column belongs to. */
function supernodeOf(start: Int32Array, supernodes: number, column: number): number {
	let low = 0;
	let high = supernodes - 1;
	while (low < high) {
		const middle = (low + high + 1) >> 1;
		if (start[middle] <= column) low = middle;
		else high = middle - 1;
	}
	return low;
}

/** Where the ways of two supernodes to the root meet, -1 where they do not: parents come later. */
function meeting(parent: Int32Array, a: number, b: number): number {
	while (a !== b) {
		if (a === -1 || b === -1) return -1;
		if (a < b) a = parent[a];
		else b = parent[b];
	}
	return a;
}
