/**
 * An elimination order in pieces: runs of consecutive columns that are factored as one dense panel
 * (supernodes), and the tree that hands updates up.
 */
export interface EliminationOrder {
	/** New position -> row of the matrix. Length n. */
	readonly perm: Int32Array;
	/** First column of each piece, new numbering; entry `pieces` is n. Length pieces + 1. */
	readonly start: Int32Array;
	/**
	 * Piece that takes a piece's updates, -1 at a root. Length pieces. Postorder: children come before
	 * parents and the pieces below any piece are the ones right before it. All entries of the factor
	 * that a piece has outside itself lie in pieces above it on its way to the root.
	 */
	readonly parent: Int32Array;
}

/** Row of the matrix -> new position. Throws a RangeError where `perm` is no permutation. */
export function invert(perm: Int32Array, n: number): Int32Array {
	const iperm = new Int32Array(n).fill(-1);
	if (perm.length !== n) throw new RangeError(`an order of ${perm.length} for ${n} rows`);
	for (let k = 0; k < n; k++) {
		const old = perm[k];
		if (!(old >= 0 && old < n) || iperm[old] !== -1) {
			throw new RangeError(`order[${k}] = ${old}: expected each of 0 to ${n - 1} once`);
		}
		iperm[old] = k;
	}
	return iperm;
}
