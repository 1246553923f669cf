import {
	columnCounts,
	eliminationTree,
	permutedLower,
	postorder,
	transpose,
	type LowerPattern
} from './elimination-tree.ts';
import type { SymmetricMatrix } from './matrix.ts';
import { findSupernodes } from './supernodes.ts';

/** Everything about a factor that depends on the matrix's pattern only; kept for the pattern. */
export interface SymbolicFactor {
	readonly n: number;
	/** Stored entries of the analysed pattern. */
	readonly storedEntries: number;
	/** Elimination order: new position -> row of the matrix. Length n. */
	readonly perm: Int32Array;
	readonly supernodes: number;
	/** First column of each supernode, new numbering. Length supernodes + 1. */
	readonly start: Int32Array;
	/** Start of each supernode's rows in `rows`. Length supernodes + 1. */
	readonly rowStart: Int32Array;
	/** Rows of each panel, new numbering, increasing; its own columns come first. */
	readonly rows: Int32Array;
	/**
	 * Start of each panel in the factor's values. Length supernodes + 1. Doubles, so that the size of
	 * a factor that is too large can be told; those of a factor that was made fit an int32.
	 */
	readonly panelStart: Float64Array;
	/** Parent supernode, -1 at a root. Children come before parents. Length supernodes. */
	readonly parent: Int32Array;
	/**
	 * For each entry of `rows` below its own columns: its place in the parent's row list. Same
	 * length as `rows`; 0 for own columns and at roots.
	 */
	readonly relative: Int32Array;
	/** Start of each supernode's matrix entries in the next two arrays. Length supernodes + 1. */
	readonly entryStart: Int32Array;
	/** Position in the matrix's value array of each entry to be loaded. */
	readonly entryFrom: Int32Array;
	/** Place of that entry in its panel. */
	readonly entryTo: Int32Array;
	/** Largest number of rows below the own columns of any panel. */
	readonly largestBelow: number;
	/** Most values that update matrices waiting for their parent take at once. */
	readonly stackValues: number;
	/** Values in all panels, the unused upper corners included. */
	readonly panelValues: number;
}

/**
 * Symbolic analysis for a multifrontal Cholesky factorisation (I. S. Duff, J. K. Reid, ACM TOMS 9
 * (1983) 302; J. W. H. Liu, SIAM Review 34 (1992) 82) in the given elimination order.
 *
 * @param order new position -> row, a permutation of 0 .. n - 1; else a RangeError
 */
export function analyse(
	matrix: Pick<SymmetricMatrix, 'n' | 'rowStart' | 'column'>,
	order: Int32Array
): SymbolicFactor {
	const { n } = matrix;
	const inOrder = permutedLower(matrix, order, invert(order, n));
	const post = postorder(eliminationTree(inOrder));
	const perm = new Int32Array(n);
	for (let k = 0; k < n; k++) perm[k] = order[post[k]];
	const iperm = invert(perm, n);
	const lower = permutedLower(matrix, perm, iperm);
	const parentColumn = eliminationTree(lower);
	const { count, start, height, parent } = findSupernodes(
		parentColumn,
		columnCounts(lower, parentColumn)
	);
	const rowStart = new Int32Array(count + 1);
	const panelStart = new Float64Array(count + 1);
	for (let s = 0; s < count; s++) {
		rowStart[s + 1] = rowStart[s] + height[s];
		panelStart[s + 1] = panelStart[s] + height[s] * (start[s + 1] - start[s]);
	}
	const rows = panelRows(lower, { count, start, rowStart, parent });
	const relative = relativeRows({ count, start, rowStart, parent }, rows);
	return {
		n,
		storedEntries: matrix.column.length,
		perm,
		supernodes: count,
		start,
		rowStart,
		rows,
		panelStart,
		parent,
		relative,
		...matrixEntries(matrix, perm, iperm, { count, start, rowStart }, rows),
		...updateSizes({ count, start, rowStart, parent }),
		panelValues: panelStart[count]
	};
}

function invert(perm: Int32Array, n: number): Int32Array {
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

interface Panels {
	readonly count: number;
	readonly start: Int32Array;
	readonly rowStart: Int32Array;
}

interface PanelTree extends Panels {
	readonly parent: Int32Array;
}

/** Row lists: a panel's own columns, then the union of its matrix rows and its children's rows. */
function panelRows(lower: LowerPattern, { count, start, rowStart, parent }: PanelTree): Int32Array {
	const below = transpose(lower);
	const rows = new Int32Array(rowStart[count]);
	const mark = new Int32Array(lower.n).fill(-1);
	const filled = new Int32Array(count);
	const firstChild = new Int32Array(count).fill(-1);
	const nextSibling = new Int32Array(count).fill(-1);
	for (let s = 0; s < count; s++) {
		const end = start[s + 1];
		let next = rowStart[s];
		for (let j = start[s]; j < end; j++) {
			rows[next++] = j;
			mark[j] = s;
		}
		for (let j = start[s]; j < end; j++) {
			for (let p = below.rowStart[j]; p < below.rowStart[j + 1]; p++) {
				const i = below.column[p];
				if (mark[i] !== s) {
					mark[i] = s;
					rows[next++] = i;
				}
			}
		}
		for (let child = firstChild[s]; child !== -1; child = nextSibling[child]) {
			for (let p = rowStart[child]; p < filled[child]; p++) {
				const i = rows[p];
				if (i >= end && mark[i] !== s) {
					mark[i] = s;
					rows[next++] = i;
				}
			}
		}
		rows.subarray(rowStart[s], next).sort();
		filled[s] = next;
		if (next !== rowStart[s + 1]) {
			throw new Error(
				`panel ${s} has ${next - rowStart[s]} rows, its count says ${rowStart[s + 1] - rowStart[s]}`
			);
		}
		if (parent[s] !== -1) {
			nextSibling[s] = firstChild[parent[s]];
			firstChild[parent[s]] = s;
		}
	}
	return rows;
}

/** Where each row below a panel stands in its parent's row list: both lists are increasing. */
function relativeRows({ count, start, rowStart, parent }: PanelTree, rows: Int32Array): Int32Array {
	const relative = new Int32Array(rows.length);
	for (let s = 0; s < count; s++) {
		if (parent[s] === -1) continue;
		const base = rowStart[parent[s]];
		let q = base;
		for (let p = rowStart[s] + start[s + 1] - start[s]; p < rowStart[s + 1]; p++) {
			while (rows[q] < rows[p]) q++;
			relative[p] = q - base;
		}
	}
	return relative;
}

/** Which entry of the matrix is loaded into which place of which panel. */
function matrixEntries(
	matrix: Pick<SymmetricMatrix, 'n' | 'rowStart' | 'column'>,
	perm: Int32Array,
	iperm: Int32Array,
	{ count, start, rowStart }: Panels,
	rows: Int32Array
): Pick<SymbolicFactor, 'entryStart' | 'entryFrom' | 'entryTo'> {
	const entries = (matrix.column.length + matrix.n) >> 1;
	const entryStart = new Int32Array(count + 1);
	const entryFrom = new Int32Array(entries);
	const entryTo = new Int32Array(entries);
	const place = new Int32Array(matrix.n);
	let next = 0;
	for (let s = 0; s < count; s++) {
		const width = start[s + 1] - start[s];
		for (let p = rowStart[s]; p < rowStart[s + 1]; p++) place[rows[p]] = p - rowStart[s];
		for (let j = start[s]; j < start[s + 1]; j++) {
			const old = perm[j];
			for (let p = matrix.rowStart[old]; p < matrix.rowStart[old + 1]; p++) {
				const i = iperm[matrix.column[p]];
				if (i < j) continue;
				entryFrom[next] = p;
				entryTo[next++] = place[i] * width + (j - start[s]);
			}
		}
		entryStart[s + 1] = next;
	}
	return { entryStart, entryFrom, entryTo };
}

/** Sizes of the working memory: children's updates wait on a stack until their parent is built. */
function updateSizes({
	count,
	start,
	rowStart,
	parent
}: PanelTree): Pick<SymbolicFactor, 'largestBelow' | 'stackValues'> {
	const below = (s: number) => rowStart[s + 1] - rowStart[s] - (start[s + 1] - start[s]);
	const waiting = new Float64Array(count);
	let onStack = 0;
	let stackValues = 0;
	let largestBelow = 0;
	for (let s = 0; s < count; s++) {
		onStack -= waiting[s];
		const own = below(s) ** 2;
		onStack += own;
		if (parent[s] !== -1) waiting[parent[s]] += own;
		largestBelow = Math.max(largestBelow, below(s));
		stackValues = Math.max(stackValues, onStack);
	}
	return { largestBelow, stackValues };
}
