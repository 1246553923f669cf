/**
 * Letters used throughout this folder:
 *
 * - A: symmetric matrix; n: its order; i, j: row and column; p: position in a value array
 * - L: lower triangular Cholesky factor, A = L L^T
 * - b, x: right-hand side and solution; r: residual b - A x
 * - perm: new position -> old index; inverse permutations are called iperm
 */

/**
 * A symmetric matrix in compressed rows, both triangles stored.
 *
 * Invariants: `rowStart` has n + 1 monotone entries from 0 to the number of stored entries;
 * columns within a row are strictly increasing; every diagonal entry is stored; entry (i, j) is
 * stored exactly when (j, i) is, with the same value.
 */
export interface SymmetricMatrix {
	readonly n: number;
	/** Start of each row in `column` and `value`. Length n + 1. */
	readonly rowStart: Int32Array;
	/** Column of each stored entry. */
	readonly column: Int32Array;
	/** Value of each stored entry. */
	readonly value: Float64Array;
}
