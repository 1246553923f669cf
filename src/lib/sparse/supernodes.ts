/**
 * Supernodes: runs of consecutive columns that are factored as one dense panel.
 */
export interface SupernodePartition {
	readonly count: number;
	/** First column of each supernode; entry `count` is n. Length count + 1. */
	readonly start: Int32Array;
	/** Rows of each panel: its own columns and those below. Length count. */
	readonly height: Int32Array;
	/** Supernode of the first row below each panel, -1 at a root. Length count. */
	readonly parent: Int32Array;
}

/** A merge may always fill panels up to this many columns. */
const SMALL_COLUMNS = 16;
/** Share of a merged panel that may be zeros, by its number of columns. */
const ZERO_SHARE: readonly (readonly [columns: number, share: number])[] = [
	[SMALL_COLUMNS, 1],
	[48, 0.1],
	[128, 0.05],
	[Infinity, 0.02]
];

function allowedZeros(columns: number): number {
	return ZERO_SHARE.find(([most]) => columns <= most)?.[1] ?? 0;
}

/** Entries of a panel's lower trapezoid. */
function panelEntries(width: number, height: number): number {
	return width * height - (width * (width - 1)) / 2;
}

/**
 * Fundamental supernodes of a postordered factor, then relaxed: a supernode joins its parent where
 * that stores few zeros (C. Ashcraft, R. Grimes, ACM TOMS 15 (1989) 291).
 */
export function findSupernodes(parent: Int32Array, counts: Int32Array): SupernodePartition {
	const n = parent.length;
	const children = new Int32Array(n);
	for (let j = 0; j < n; j++) if (parent[j] !== -1) children[parent[j]]++;
	const start: number[] = [];
	const of = new Int32Array(n);
	for (let j = 0; j < n; j++) {
		const continues =
			j > 0 && parent[j - 1] === j && counts[j] === counts[j - 1] - 1 && children[j] === 1;
		if (!continues) start.push(j);
		of[j] = start.length - 1;
	}
	const count = start.length;
	const end = Int32Array.from({ length: count }, (_, s) => (s + 1 < count ? start[s + 1] : n));
	const height = Int32Array.from(start, (j) => counts[j]);
	const up = Int32Array.from(end, (after) =>
		parent[after - 1] === -1 ? -1 : of[parent[after - 1]]
	);
	/** Entries that are not zeros of a merge. */
	const entries = Float64Array.from(height, (rows, s) => panelEntries(end[s] - start[s], rows));
	/** First column of the merged panel that ends where supernode s ends. */
	const mergedStart = Int32Array.from(start);
	const isMerged = new Uint8Array(count);
	for (let s = 0; s < count; s++) {
		const p = up[s];
		// Only the last child is next to its parent's columns.
		if (p === -1 || end[s] !== start[p]) continue;
		const ownWidth = end[s] - mergedStart[s];
		const width = ownWidth + end[p] - start[p];
		const rows = ownWidth + counts[start[p]];
		const total = panelEntries(width, rows);
		const filled = entries[s] + entries[p];
		if (total - filled > allowedZeros(width) * total) continue;
		isMerged[s] = 1;
		mergedStart[p] = mergedStart[s];
		height[p] = rows;
		entries[p] = filled;
	}
	const kept: number[] = [];
	const newIndex = new Int32Array(count);
	for (let s = 0; s < count; s++) {
		newIndex[s] = kept.length;
		if (!isMerged[s]) kept.push(s);
	}
	return {
		count: kept.length,
		start: Int32Array.from([...kept.map((s) => mergedStart[s]), n]),
		height: Int32Array.from(kept, (s) => height[s]),
		// A parent that has itself joined its own parent is found where its columns went.
		parent: Int32Array.from(kept, (s) => (up[s] === -1 ? -1 : newIndex[up[s]]))
	};
}
