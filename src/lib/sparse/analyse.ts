import { invert, type EliminationOrder } from './elimination-order.ts';
import type { SymmetricMatrix } from './matrix.ts';

/** Everything about a factor that depends on the matrix's pattern only; kept for the pattern. */
export interface SymbolicFactor {
	readonly n: number;
	/** Stored entries of the analysed pattern. */
	readonly storedEntries: number;
	/** Elimination order: new position -> row of the matrix. Length n. */
	readonly perm: Int32Array;
	/** Row of the matrix -> new position. Length n. */
	readonly iperm: Int32Array;
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
	/** Values in all panels, the unused upper corners included. */
	readonly panelValues: number;
}

/**
 * Symbolic analysis for a multifrontal Cholesky factorisation (I. S. Duff, J. K. Reid, ACM TOMS 9
 * (1983) 302; J. W. H. Liu, SIAM Review 34 (1992) 82): the rows of every panel, where they stand in
 * the parent's, and where the matrix's entries are loaded. A piece of the order is one panel.
 *
 * @param order of a permutation of 0 .. n - 1; else a RangeError
 */
export function analyse(
	matrix: Pick<SymmetricMatrix, 'n' | 'rowStart' | 'column'>,
	order: EliminationOrder
): SymbolicFactor {
	const { n } = matrix;
	const { perm, start, parent } = order;
	const iperm = invert(perm, n);
	const supernodes = parent.length;
	const entries = (matrix.column.length + n) >> 1;
	const rowStart = new Int32Array(supernodes + 1);
	const panelStart = new Float64Array(supernodes + 1);
	const entryStart = new Int32Array(supernodes + 1);
	const entryFrom = new Int32Array(entries);
	const entryTo = new Int32Array(entries);
	let rows = new Int32Array(4 * n);
	let relative = new Int32Array(4 * n);
	/** Supernode whose list a row was last put into. Length n. */
	const mark = new Int32Array(n).fill(-1);
	/** Place of a row in the list at hand. Length n. */
	const place = new Int32Array(n);
	const firstChild = new Int32Array(supernodes).fill(-1);
	const nextSibling = new Int32Array(supernodes).fill(-1);
	let loaded = 0;
	let next = 0;
	for (let s = 0; s < supernodes; s++) {
		const first = start[s];
		const end = start[s + 1];
		const width = end - first;
		const base = next;
		let most = matrixEntriesIn(matrix, perm, first, end) + width;
		for (let child = firstChild[s]; child !== -1; child = nextSibling[child]) {
			most += rowStart[child + 1] - rowStart[child];
		}
		if (next + most > rows.length) {
			rows = grown(rows, next + most);
			relative = grown(relative, next + most);
		}
		for (let j = first; j < end; j++) {
			rows[next++] = j;
			mark[j] = s;
		}
		// The rows of the matrix's entries; each entry keeps its row until the places are known.
		for (let j = first; j < end; j++) {
			const old = perm[j];
			for (let p = matrix.rowStart[old]; p < matrix.rowStart[old + 1]; p++) {
				const i = iperm[matrix.column[p]];
				if (i < j) continue;
				entryFrom[loaded] = p;
				entryTo[loaded++] = i;
				if (mark[i] === s) continue;
				mark[i] = s;
				rows[next++] = i;
			}
		}
		for (let child = firstChild[s]; child !== -1; child = nextSibling[child]) {
			const stop = rowStart[child + 1];
			for (let p = rowStart[child] + start[child + 1] - start[child]; p < stop; p++) {
				const i = rows[p];
				if (mark[i] === s) continue;
				mark[i] = s;
				rows[next++] = i;
			}
		}
		sortRun(rows, base + width, next);
		rowStart[s + 1] = next;
		panelStart[s + 1] = panelStart[s] + (next - base) * width;
		for (let p = base; p < next; p++) place[rows[p]] = p - base;
		for (let entry = entryStart[s], j = first; entry < loaded; entry++) {
			// Every column has an entry, its diagonal: one step reaches the next.
			const from = entryFrom[entry];
			if (from < matrix.rowStart[perm[j]] || from >= matrix.rowStart[perm[j] + 1]) j++;
			entryTo[entry] = place[entryTo[entry]] * width + (j - first);
		}
		entryStart[s + 1] = loaded;
		for (let child = firstChild[s]; child !== -1; child = nextSibling[child]) {
			const stop = rowStart[child + 1];
			for (let p = rowStart[child] + start[child + 1] - start[child]; p < stop; p++) {
				relative[p] = place[rows[p]];
			}
		}
		if (parent[s] === -1) continue;
		nextSibling[s] = firstChild[parent[s]];
		firstChild[parent[s]] = s;
	}
	return {
		n,
		storedEntries: matrix.column.length,
		perm,
		iperm,
		supernodes,
		start,
		rowStart,
		rows: rows.slice(0, next),
		panelStart,
		parent,
		relative: relative.slice(0, next),
		entryStart,
		entryFrom,
		entryTo,
		panelValues: panelStart[supernodes]
	};
}

/** Entries of the matrix in the rows of a piece: no more rows can come from them. */
function matrixEntriesIn(
	{ rowStart }: Pick<SymmetricMatrix, 'rowStart'>,
	perm: Int32Array,
	first: number,
	end: number
): number {
	let count = 0;
	for (let j = first; j < end; j++) count += rowStart[perm[j] + 1] - rowStart[perm[j]];
	return count;
}

function grown(values: Int32Array, least: number): Int32Array<ArrayBuffer> {
	const larger = new Int32Array(Math.max(least, values.length + (values.length >> 1)));
	larger.set(values);
	return larger;
}

/** Longest run for which insertion beats the engine's sort, which is called at some cost. */
const INSERTION_LENGTH = 48;

/** Sorts `values` from `begin` to before `end`. */
function sortRun(values: Int32Array, begin: number, end: number): void {
	if (end - begin > INSERTION_LENGTH) {
		values.subarray(begin, end).sort();
		return;
	}
	for (let p = begin + 1; p < end; p++) {
		const value = values[p];
		let q = p;
		for (; q > begin && values[q - 1] > value; q--) values[q] = values[q - 1];
		values[q] = value;
	}
}
