import { invert, type EliminationOrder } from './elimination-order.ts';
import { columnCounts, eliminationTree, permutedLower, postorder } from './elimination-tree.ts';
import type { SymmetricMatrix } from './matrix.ts';

/** A merge may always fill panels up to this many columns. */
const SMALL_COLUMNS = 16;

/** Share of a merged panel that may be zeros, by its number of columns. */
function allowedZeros(columns: number): number {
	if (columns <= SMALL_COLUMNS) return 1;
	if (columns <= 48) return 0.1;
	return columns <= 128 ? 0.05 : 0.02;
}

/** Entries of a panel's lower trapezoid. */
function panelEntries(width: number, height: number): number {
	return width * height - (width * (width - 1)) / 2;
}

/**
 * Groups the columns of any order into pieces: the order is made a postorder of its elimination
 * tree, which leaves the fill as it is.
 *
 * @param order new position -> row, a permutation of 0 .. n - 1; else a RangeError
 */
export function groupColumns(
	matrix: Pick<SymmetricMatrix, 'n' | 'rowStart' | 'column'>,
	order: Int32Array
): EliminationOrder {
	const { n } = matrix;
	const inOrder = permutedLower(matrix, order, invert(order, n));
	const post = postorder(eliminationTree(inOrder));
	const perm = new Int32Array(n);
	for (let k = 0; k < n; k++) perm[k] = order[post[k]];
	const lower = permutedLower(matrix, perm, invert(perm, n));
	const parentColumn = eliminationTree(lower);
	return { perm, ...findSupernodes(parentColumn, columnCounts(lower, parentColumn)) };
}

/**
 * Fundamental supernodes of a postordered factor, then relaxed: a supernode joins its parent where
 * that stores few zeros (C. Ashcraft, R. Grimes, ACM TOMS 15 (1989) 291).
 */
function findSupernodes(
	parent: Int32Array,
	counts: Int32Array
): Pick<EliminationOrder, 'start' | 'parent'> {
	const fundamental = fundamentalSupernodes(parent, counts);
	const { count, start, up } = fundamental;
	/** Entries that are not zeros of a merge. */
	const entries = new Float64Array(count);
	for (let s = 0; s < count; s++) {
		entries[s] = panelEntries(start[s + 1] - start[s], counts[start[s]]);
	}
	/** First column of the merged panel that ends where supernode s ends. */
	const mergedStart = start.slice(0, count);
	const isMerged = new Uint8Array(count);
	let kept = count;
	for (let s = 0; s < count; s++) {
		const p = up[s];
		const end = start[s + 1];
		// Only the last child is next to its parent's columns.
		if (p === -1 || end !== start[p]) continue;
		const ownWidth = end - mergedStart[s];
		const width = ownWidth + start[p + 1] - start[p];
		const rows = ownWidth + counts[start[p]];
		const total = panelEntries(width, rows);
		const filled = entries[s] + entries[p];
		if (total - filled > allowedZeros(width) * total) continue;
		isMerged[s] = 1;
		kept--;
		mergedStart[p] = mergedStart[s];
		entries[p] = filled;
	}
	return keepUnmerged(fundamental, kept, isMerged, mergedStart);
}

interface FundamentalSupernodes {
	readonly count: number;
	/** First column of each; entry `count` is n. Length count + 1. */
	readonly start: Int32Array;
	/** Supernode of the parent of each one's last column, -1 at a root. Length count. */
	readonly up: Int32Array;
}

/** Longest runs of columns of one structure, each the only child of the next. */
function fundamentalSupernodes(parent: Int32Array, counts: Int32Array): FundamentalSupernodes {
	const n = parent.length;
	const children = new Int32Array(n);
	for (let j = 0; j < n; j++) if (parent[j] !== -1) children[parent[j]]++;
	/** Supernode of each column. */
	const of = new Int32Array(n);
	const starts = new Int32Array(n + 1);
	let count = 0;
	for (let j = 0; j < n; j++) {
		const continues =
			j > 0 && parent[j - 1] === j && counts[j] === counts[j - 1] - 1 && children[j] === 1;
		if (!continues) starts[count++] = j;
		of[j] = count - 1;
	}
	starts[count] = n;
	const up = new Int32Array(count);
	for (let s = 0; s < count; s++) {
		const above = parent[starts[s + 1] - 1];
		up[s] = above === -1 ? -1 : of[above];
	}
	return { count, start: starts.slice(0, count + 1), up };
}

/** Leaves out the supernodes that joined their parents, and numbers the rest anew. */
function keepUnmerged(
	{ count, start, up }: FundamentalSupernodes,
	kept: number,
	isMerged: Uint8Array,
	mergedStart: Int32Array
): Pick<EliminationOrder, 'start' | 'parent'> {
	const newIndex = new Int32Array(count);
	for (let s = 0, next = 0; s < count; s++) {
		newIndex[s] = next;
		if (isMerged[s] === 0) next++;
	}
	const keptStart = new Int32Array(kept + 1);
	const parent = new Int32Array(kept);
	for (let s = 0; s < count; s++) {
		if (isMerged[s] === 1) continue;
		const k = newIndex[s];
		keptStart[k] = mergedStart[s];
		// A parent that has itself joined its own parent is found where its columns went.
		parent[k] = up[s] === -1 ? -1 : newIndex[up[s]];
	}
	keptStart[kept] = start[count];
	return { start: keptStart, parent };
}
