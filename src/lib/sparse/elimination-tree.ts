/**
 * Lower triangle of a permuted symmetric matrix, by rows: the columns j < i of row i, unsorted.
 * `rowStart` has length n + 1.
 */
export interface LowerPattern {
	readonly n: number;
	readonly rowStart: Int32Array;
	readonly column: Int32Array;
}

/** The part below the diagonal of P A P^T, with P given by perm (new -> old) and its inverse. */
export function permutedLower(
	pattern: { readonly n: number; readonly rowStart: Int32Array; readonly column: Int32Array },
	perm: Int32Array,
	iperm: Int32Array
): LowerPattern {
	const { n } = pattern;
	const rowStart = new Int32Array(n + 1);
	const column = new Int32Array((pattern.column.length - n) >> 1);
	let count = 0;
	for (let i = 0; i < n; i++) {
		rowStart[i] = count;
		const old = perm[i];
		for (let p = pattern.rowStart[old]; p < pattern.rowStart[old + 1]; p++) {
			const j = iperm[pattern.column[p]];
			if (j < i) column[count++] = j;
		}
	}
	rowStart[n] = count;
	return { n, rowStart, column };
}

/**
 * Elimination tree: parent of each column of the factor, -1 at a root. J. W. H. Liu, "The role of
 * elimination trees in sparse factorization", SIAM J. Matrix Anal. Appl. 11 (1990) 134, with path
 * compression through virtual ancestors.
 */
export function eliminationTree({ n, rowStart, column }: LowerPattern): Int32Array {
	const parent = new Int32Array(n).fill(-1);
	const ancestor = new Int32Array(n).fill(-1);
	for (let i = 0; i < n; i++) {
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) {
			let j = column[p];
			while (j !== -1 && j < i) {
				const next = ancestor[j];
				ancestor[j] = i;
				if (next === -1) parent[j] = i;
				j = next;
			}
		}
	}
	return parent;
}

/** Postorder of a forest: children before parents, subtrees contiguous. New position -> node. */
export function postorder(parent: Int32Array): Int32Array {
	const n = parent.length;
	const firstChild = new Int32Array(n).fill(-1);
	const nextSibling = new Int32Array(n).fill(-1);
	// Backwards, so that siblings are visited in increasing order.
	for (let j = n - 1; j >= 0; j--) {
		if (parent[j] === -1) continue;
		nextSibling[j] = firstChild[parent[j]];
		firstChild[parent[j]] = j;
	}
	const order = new Int32Array(n);
	const stack = new Int32Array(n);
	let count = 0;
	for (let root = 0; root < n; root++) {
		if (parent[root] !== -1) continue;
		let depth = 0;
		stack[0] = root;
		while (depth >= 0) {
			const j = stack[depth];
			const child = firstChild[j];
			if (child === -1) {
				order[count++] = j;
				depth--;
			} else {
				firstChild[j] = nextSibling[child];
				stack[++depth] = child;
			}
		}
	}
	return order;
}

/**
 * Entries of each column of the factor, diagonal included, for columns numbered in postorder.
 * J. R. Gilbert, E. G. Ng, B. W. Peyton, "An efficient algorithm to compute row and column counts
 * for sparse Cholesky factorization", SIAM J. Matrix Anal. Appl. 15 (1994) 1075: a column starts a
 * row's subtree where it is a leaf of it, and two leaves meet at their lowest common ancestor.
 */
export function columnCounts(lower: LowerPattern, parent: Int32Array): Int32Array {
	const { n } = lower;
	const upper = transpose(lower);
	const count = new Int32Array(n);
	/** Smallest descendant of each column; subtrees are contiguous in postorder. */
	const first = new Int32Array(n);
	for (let j = 0; j < n; j++) first[j] = j;
	for (let j = 0; j < n; j++) {
		const up = parent[j];
		if (first[j] === j) count[j] = 1;
		if (up !== -1 && first[j] < first[up]) first[up] = first[j];
	}
	const largestFirst = new Int32Array(n).fill(-1);
	const previousLeaf = new Int32Array(n).fill(-1);
	const ancestor = new Int32Array(n);
	for (let j = 0; j < n; j++) ancestor[j] = j;
	for (let j = 0; j < n; j++) {
		if (parent[j] !== -1) count[parent[j]]--;
		for (let p = upper.rowStart[j]; p < upper.rowStart[j + 1]; p++) {
			const i = upper.column[p];
			if (first[j] <= largestFirst[i]) continue;
			largestFirst[i] = first[j];
			count[j]++;
			const leaf = previousLeaf[i];
			if (leaf !== -1) count[findRoot(ancestor, leaf)]--;
			previousLeaf[i] = j;
		}
		if (parent[j] !== -1) ancestor[j] = parent[j];
	}
	for (let j = 0; j < n; j++) if (parent[j] !== -1) count[parent[j]] += count[j];
	return count;
}

/** For each column j the rows i > j that it has an entry in. */
export function transpose({ n, rowStart, column }: LowerPattern): LowerPattern {
	const start = new Int32Array(n + 1);
	for (let p = 0; p < column.length; p++) start[column[p] + 1]++;
	for (let j = 0; j < n; j++) start[j + 1] += start[j];
	const next = start.slice(0, n);
	const rows = new Int32Array(column.length);
	for (let i = 0; i < n; i++) {
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) rows[next[column[p]]++] = i;
	}
	return { n, rowStart: start, column: rows };
}

/** Root of the set that a node is in, halving the path on the way. */
function findRoot(ancestor: Int32Array, node: number): number {
	let j = node;
	while (ancestor[j] !== j) {
		ancestor[j] = ancestor[ancestor[j]];
		j = ancestor[j];
	}
	return j;
}
