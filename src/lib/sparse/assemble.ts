import type { SymmetricMatrix } from './matrix.ts';

/**
 * Where the edges of a weighted graph go in its matrix: depends on the edges only, so that new
 * conductances refill the same pattern.
 */
export interface AssemblyPlan {
	readonly n: number;
	/** End nodes of each edge, as given. Length: number of edges. */
	readonly from: Int32Array;
	readonly to: Int32Array;
	/** Pattern of the matrix, as in `SymmetricMatrix`. */
	readonly rowStart: Int32Array;
	readonly column: Int32Array;
	/** Position in the value array of (from, to) and of (to, from) of each edge. */
	readonly upperEntry: Int32Array;
	readonly lowerEntry: Int32Array;
	/** Position of each diagonal entry. Length n. */
	readonly diagonalEntry: Int32Array;
}

/**
 * Plans the matrix of a graph with n nodes. Parallel edges share an entry; an edge from a node to
 * itself is refused with a RangeError, as is an end outside 0 .. n - 1.
 */
export function planAssembly(n: number, from: Int32Array, to: Int32Array): AssemblyPlan {
	const edges = from.length;
	if (to.length !== edges) throw new RangeError(`${edges} edge starts but ${to.length} edge ends`);
	const entries = 2 * edges + n;
	/** First the entries of each row, then where the next of a row goes. */
	const next = new Int32Array(n + 1);
	for (let e = 0; e < edges; e++) {
		const i = from[e];
		const j = to[e];
		if (!(i >= 0 && i < n && j >= 0 && j < n && i !== j)) {
			throw new RangeError(`edge ${e} joins ${i} and ${j}, expected two nodes of 0 to ${n - 1}`);
		}
		next[i]++;
		next[j]++;
	}
	// Entry e < edges is (from, to), e < 2 edges is (to, from), the rest is the diagonal.
	const slotColumn = new Int32Array(entries);
	const slotEntry = new Int32Array(entries);
	let slots = 0;
	for (let i = 0; i < n; i++) {
		const begin = slots;
		slots += next[i] + 1;
		slotColumn[begin] = i;
		slotEntry[begin] = 2 * edges + i;
		next[i] = begin + 1;
	}
	for (let e = 0; e < edges; e++) {
		const upper = next[from[e]]++;
		slotColumn[upper] = to[e];
		slotEntry[upper] = e;
		const lower = next[to[e]]++;
		slotColumn[lower] = from[e];
		slotEntry[lower] = edges + e;
	}
	const rowStart = new Int32Array(n + 1);
	const column = new Int32Array(entries);
	const position = new Int32Array(entries);
	let stored = 0;
	for (let i = 0, begin = 0; i < n; i++) {
		const end = next[i];
		sortSlots(slotColumn, slotEntry, begin, end);
		for (let k = begin; k < end; k++) {
			if (k === begin || slotColumn[k] !== slotColumn[k - 1]) column[stored++] = slotColumn[k];
			position[slotEntry[k]] = stored - 1;
		}
		rowStart[i + 1] = stored;
		begin = end;
	}
	return {
		n,
		from,
		to,
		rowStart,
		column: column.slice(0, stored),
		upperEntry: position.slice(0, edges),
		lowerEntry: position.slice(edges, 2 * edges),
		diagonalEntry: position.slice(2 * edges)
	};
}

/** Longest row that is sorted by insertion: rows of a grid have a handful of entries. */
const INSERTION_LENGTH = 32;

/** Sorts the slots of a row by column. */
function sortSlots(column: Int32Array, entry: Int32Array, begin: number, end: number): void {
	if (end - begin > INSERTION_LENGTH) {
		const order = Int32Array.from({ length: end - begin }, (_, k) => begin + k).sort(
			(a, b) => column[a] - column[b]
		);
		const sortedColumns = order.map((k) => column[k]);
		entry.set(
			order.map((k) => entry[k]),
			begin
		);
		column.set(sortedColumns, begin);
		return;
	}
	for (let k = begin + 1; k < end; k++) {
		const c = column[k];
		const e = entry[k];
		let to = k;
		for (; to > begin && column[to - 1] > c; to--) {
			column[to] = column[to - 1];
			entry[to] = entry[to - 1];
		}
		column[to] = c;
		entry[to] = e;
	}
}

/**
 * The weighted graph Laplacian plus a diagonal: the nodal matrix of a resistor network whose edges
 * have the given conductances and whose nodes are tied to sources by `tie`. Lengths: edges; n.
 *
 * @param value entries of an earlier matrix of this plan, to be overwritten; fresh if not given
 */
export function assembleLaplacian(
	plan: AssemblyPlan,
	conductance: Float64Array,
	tie: Float64Array,
	value: Float64Array = new Float64Array(plan.column.length)
): SymmetricMatrix {
	const { n, from, to, rowStart, column, upperEntry, lowerEntry, diagonalEntry } = plan;
	if (conductance.length !== from.length || tie.length !== n) {
		throw new RangeError(
			`${conductance.length} conductances and ${tie.length} ties, expected ${from.length} and ${n}`
		);
	}
	if (value.length !== column.length) {
		throw new RangeError(`${value.length} entries to overwrite, the plan has ${column.length}`);
	}
	value.fill(0);
	for (let i = 0; i < n; i++) value[diagonalEntry[i]] = tie[i];
	for (let e = 0; e < from.length; e++) {
		const g = conductance[e];
		value[upperEntry[e]] -= g;
		value[lowerEntry[e]] -= g;
		value[diagonalEntry[from[e]]] += g;
		value[diagonalEntry[to[e]]] += g;
	}
	return { n, rowStart, column, value };
}

/**
 * A symmetric matrix from the entries of one triangle (rows, columns, values; any order, duplicates
 * summed). Diagonal entries that are not given are zero.
 */
export function assembleEntries(
	n: number,
	rows: Int32Array,
	columns: Int32Array,
	values: Float64Array
): SymmetricMatrix {
	const isOff = (e: number) => rows[e] !== columns[e];
	let off = 0;
	for (let e = 0; e < rows.length; e++) if (isOff(e)) off++;
	const from = new Int32Array(off);
	const to = new Int32Array(off);
	const offValue = new Float64Array(off);
	const diagonal = new Float64Array(n);
	let next = 0;
	for (let e = 0; e < rows.length; e++) {
		if (!isOff(e)) {
			diagonal[rows[e]] += values[e];
			continue;
		}
		from[next] = rows[e];
		to[next] = columns[e];
		offValue[next++] = values[e];
	}
	const { rowStart, column, upperEntry, lowerEntry, diagonalEntry } = planAssembly(n, from, to);
	const value = new Float64Array(column.length);
	for (let i = 0; i < n; i++) value[diagonalEntry[i]] = diagonal[i];
	for (let e = 0; e < off; e++) {
		value[upperEntry[e]] += offValue[e];
		value[lowerEntry[e]] += offValue[e];
	}
	return { n, rowStart, column, value };
}
