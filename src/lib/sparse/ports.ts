import { extendMemory } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';

/**
 * A few rows of the matrix, the ports, with w = L^-1 e of each, which is nonzero only on the way from
 * its supernode to the root.
 */
export interface Ports {
	/** Entry of A^-1 between ports a and b, indices into the rows that were given. */
	at(a: number, b: number): number;
	/** All entries by rows, symmetric. Length ports * ports. */
	all(): Float64Array;
	/** Adds `scale` times w of a port to y, n doubles in the new numbering. */
	addTo(y: Float64Array, port: number, scale: number): void;
}

/**
 * The inverse between the given rows of the matrix, entry by entry as it is asked for: an entry is
 * the dot product of two ports' w over the common end of their ways (T. A. Davis, Direct Methods for
 * Sparse Linear Systems, 2006, chapter 3, for the sparse triangular solve).
 *
 * @param rows of the matrix, each any number of times
 */
export function createPorts(factor: CholeskyFactor, rows: ArrayLike<number>): Ports {
	const { symbolic, space } = factor;
	const { n, iperm, start, parent } = symbolic;
	const { kernels, layout, memory } = space;
	const count = rows.length;
	const supernode = Int32Array.from(rows, (row) => supernodeOf(start, iperm[row]));
	const lengthOf = wayLengths(start, parent);
	let values = 0;
	const offset = Float64Array.from(supernode, (s) => {
		const from = values;
		values += lengthOf(s);
		return from;
	});
	const vectorsAt = extendMemory(space, 8 * values);
	const y = new Float64Array(memory.buffer, layout.ownY, n);
	const vectors = new Float64Array(memory.buffer, vectorsAt, values);
	y.fill(0);
	for (let p = 0; p < count; p++) {
		y[iperm[rows[p]]] = 1;
		kernels.forwardPath(supernode[p], layout.ownY);
		for (let s = supernode[p]; s !== -1; s = parent[s]) {
			const own = y.subarray(start[s], start[s + 1]);
			vectors.set(own, offset[p] + lengthOf(s) - own.length);
			own.fill(0);
		}
	}
	const known = new Float64Array(count * count).fill(NaN);

	function at(a: number, b: number): number {
		const kept = known[a * count + b];
		if (!Number.isNaN(kept)) return kept;
		const common = lengthOf(meeting(parent, supernode[a], supernode[b]));
		const value = kernels.dotProduct(vectorsAt + 8 * offset[a], vectorsAt + 8 * offset[b], common);
		known[a * count + b] = value;
		known[b * count + a] = value;
		return value;
	}

	return {
		at,
		all() {
			for (let a = 0; a < count; a++) for (let b = 0; b <= a; b++) at(a, b);
			return known;
		},
		addTo(target, port, scale) {
			const all = new Float64Array(memory.buffer, vectorsAt, values);
			for (let s = supernode[port]; s !== -1; s = parent[s]) {
				const first = start[s];
				const from = offset[port] + lengthOf(s) - (start[s + 1] - first);
				for (let j = first; j < start[s + 1]; j++) target[j] += scale * all[from + j - first];
			}
		}
	};
}

/** Columns on the way of a supernode to the root, its own included; 0 for none (-1). */
function wayLengths(start: Int32Array, parent: Int32Array): (supernode: number) => number {
	const lengths = new Map([[-1, 0]]);
	return function lengthOf(s: number): number {
		const known = lengths.get(s);
		if (known !== undefined) return known;
		const length = lengthOf(parent[s]) + start[s + 1] - start[s];
		lengths.set(s, length);
		return length;
	};
}

/** The supernode that a column belongs to. */
function supernodeOf(start: Int32Array, column: number): number {
	let low = 0;
	let high = start.length - 2;
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
