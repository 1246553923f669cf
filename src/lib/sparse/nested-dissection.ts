import type { SymmetricMatrix } from './matrix.ts';

/** Parts of at most this many nodes are left as they are: smaller cuts save no fill. */
const LEAF_NODES = 12;

/**
 * Geometric nested dissection (A. George, SIAM J. Numer. Anal. 10 (1973) 345): each part is cut at
 * the median of the longer side of its bounding box; the nodes of the low side that have a
 * neighbour on the high side separate the two and are ordered last. Needs a coordinate pair for
 * each node (any unit, finite; else a RangeError), not a lattice.
 *
 * @returns perm: new position -> old index, length n
 */
export function orderNestedDissection(
	matrix: SymmetricMatrix,
	x: ArrayLike<number>,
	y: ArrayLike<number>
): Int32Array {
	const { n, rowStart, column } = matrix;
	if (x.length !== n || y.length !== n) {
		throw new RangeError(`${x.length} and ${y.length} coordinates for ${n} nodes`);
	}
	for (let i = 0; i < n; i++) {
		if (!Number.isFinite(x[i]) || !Number.isFinite(y[i])) {
			throw new RangeError(`node ${i} is at ${x[i]}, ${y[i]}: expected finite coordinates`);
		}
	}
	const order = new Int32Array(n);
	for (let i = 0; i < n; i++) order[i] = i;
	/** Part that each node is in at present; a neighbour in another part does not count. */
	const part = new Int32Array(n);
	const scratch = new Int32Array(n);
	const HIGH = -1;
	let parts = 1;
	const stack: [begin: number, end: number][] = [[0, n]];
	for (let open = stack.pop(); open; open = stack.pop()) {
		const [begin, end] = open;
		if (end - begin <= LEAF_NODES) continue;
		const along = longerSide(order, begin, end, x, y);
		if (!along) continue;
		const cut = medianCut(order, begin, end, along, scratch);
		const label = parts++;
		for (let k = begin; k < end; k++) {
			part[order[k]] = along[order[k]] <= cut ? label : HIGH;
		}
		// Low nodes without a high neighbour stay in front, the high side follows, the separator ends.
		let low = begin;
		let high = 0;
		let separator = end;
		for (let k = begin; k < end; k++) {
			const i = order[k];
			if (part[i] === HIGH) {
				scratch[high++] = i;
				continue;
			}
			let isSeparator = false;
			for (let p = rowStart[i]; p < rowStart[i + 1] && !isSeparator; p++) {
				isSeparator = part[column[p]] === HIGH;
			}
			// Separator nodes wait at the far end of the scratch space.
			if (isSeparator) scratch[--separator - begin] = i;
			else order[low++] = i;
		}
		const highLabel = parts++;
		for (let k = 0; k < high; k++) {
			order[low + k] = scratch[k];
			part[scratch[k]] = highLabel;
		}
		const separatorLabel = parts++;
		for (let k = separator; k < end; k++) {
			order[k] = scratch[k - begin];
			part[order[k]] = separatorLabel;
		}
		stack.push([begin, low], [low, separator]);
	}
	return order;
}

/** The coordinate in which the part is longer, or null where all its nodes are at one place. */
function longerSide(
	order: Int32Array,
	begin: number,
	end: number,
	x: ArrayLike<number>,
	y: ArrayLike<number>
): ArrayLike<number> | null {
	let minX = Infinity;
	let maxX = -Infinity;
	let minY = Infinity;
	let maxY = -Infinity;
	for (let k = begin; k < end; k++) {
		const i = order[k];
		if (x[i] < minX) minX = x[i];
		if (x[i] > maxX) maxX = x[i];
		if (y[i] < minY) minY = y[i];
		if (y[i] > maxY) maxY = y[i];
	}
	if (maxX === minX && maxY === minY) return null;
	return maxX - minX >= maxY - minY ? x : y;
}

/**
 * A value such that some nodes lie at or below it and some above, as near to the middle as the
 * coordinates allow. The part has at least two different coordinates.
 */
function medianCut(
	order: Int32Array,
	begin: number,
	end: number,
	along: ArrayLike<number>,
	scratch: Int32Array
): number {
	const count = end - begin;
	for (let k = 0; k < count; k++) scratch[k] = order[begin + k];
	const middle = selectNth(scratch, count, (count - 1) >> 1, along);
	let hasAbove = false;
	let below = -Infinity;
	for (let k = 0; k < count; k++) {
		const value = along[scratch[k]];
		if (value > middle) hasAbove = true;
		else if (value < middle && value > below) below = value;
	}
	return hasAbove ? middle : below;
}

/** Quickselect (Hoare 1961): the nth smallest coordinate of the first `count` items, reordering them. */
function selectNth(
	items: Int32Array,
	count: number,
	nth: number,
	along: ArrayLike<number>
): number {
	let left = 0;
	let right = count - 1;
	while (left < right) {
		const a = along[items[left]];
		const b = along[items[(left + right) >> 1]];
		const c = along[items[right]];
		const pivot = a < b ? (b < c ? b : a < c ? c : a) : a < c ? a : b < c ? c : b;
		let i = left;
		let j = right;
		while (i <= j) {
			while (along[items[i]] < pivot) i++;
			while (along[items[j]] > pivot) j--;
			if (i <= j) {
				const swap = items[i];
				items[i++] = items[j];
				items[j--] = swap;
			}
		}
		if (nth <= j) right = j;
		else if (nth >= i) left = i;
		else break;
	}
	return along[items[nth]];
}
