import { extendMemory } from './factor-memory.ts';
import type { CholeskyFactor } from './factorise.ts';
import { unknownsView } from './substitute.ts';

/**
 * A few rows of the matrix, the ports, with w = L^-1 e of each, which is nonzero only on the way from
 * its supernode to the root.
 */
export interface Ports {
	/** Row of the matrix that each port stands for. */
	readonly rows: Int32Array;
	/** Entry of A^-1 between ports a and b. */
	at(a: number, b: number): number;
	/** All entries by rows, symmetric. Length ports * ports. */
	all(): Float64Array;
	/** Makes a port stand for another row. */
	move(port: number, row: number): void;
	/**
	 * Adds `scale` times w of a port to y, in the new numbering; with `lanes` of each unknown side by
	 * side to one lane of them.
	 */
	addTo(y: Float64Array, port: number, scale: number, lanes?: number, lane?: number): void;
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
	const { iperm, start, parent } = symbolic;
	const { kernels, layout } = space;
	const count = rows.length;
	const lengthOf = wayLengths(start, parent);
	const portRows = Int32Array.from(rows);
	const supernode = new Int32Array(count);
	/** Where w of each port lies, bytes, and how many values fit there. */
	const vectorAt = new Float64Array(count);
	const capacity = new Int32Array(count);
	const known = new Float64Array(count * count);

	function move(port: number, row: number): void {
		const s = supernodeOf(start, iperm[row]);
		portRows[port] = row;
		supernode[port] = s;
		if (lengthOf(s) > capacity[port]) {
			capacity[port] = lengthOf(s);
			vectorAt[port] = extendMemory(space, 8 * capacity[port]);
		}
		// The factor's own unknowns, of which only those on the way are read or written.
		const y = unknownsView(factor, layout.ownY, 1);
		eachPiece(s, (first, end) => y.fill(0, first, end));
		y[iperm[row]] = 1;
		kernels.forwardPath(s, layout.ownY);
		const vector = vectorOf(port);
		eachPiece(s, (first, end, from) => {
			vector.set(y.subarray(first, end), from);
		});
		for (let other = 0; other < count; other++) {
			known[port * count + other] = NaN;
			known[other * count + port] = NaN;
		}
	}

	function vectorOf(port: number): Float64Array {
		return new Float64Array(space.memory.buffer, vectorAt[port], lengthOf(supernode[port]));
	}

	/** Calls `take` with the columns of every supernode on the way, and their place in w. */
	function eachPiece(s: number, take: (first: number, end: number, from: number) => void): void {
		for (; s !== -1; s = parent[s]) take(start[s], start[s + 1], lengthOf(parent[s]));
	}

	function at(a: number, b: number): number {
		const kept = known[a * count + b];
		if (!Number.isNaN(kept)) return kept;
		const common = lengthOf(meeting(parent, supernode[a], supernode[b]));
		const value = kernels.dotProduct(vectorAt[a], vectorAt[b], common);
		known[a * count + b] = value;
		known[b * count + a] = value;
		return value;
	}

	for (let port = 0; port < count; port++) move(port, rows[port]);

	return {
		rows: portRows,
		at,
		all() {
			for (let a = 0; a < count; a++) for (let b = 0; b <= a; b++) at(a, b);
			return known;
		},
		move,
		addTo(y, port, scale, lanes = 1, lane = 0) {
			const vector = vectorOf(port);
			eachPiece(supernode[port], (first, end, from) => {
				for (let j = first; j < end; j++) y[j * lanes + lane] += scale * vector[from + j - first];
			});
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
