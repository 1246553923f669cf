/** Multifrontal factorisation over a range of supernodes. */
import { doubles, getF64, getI32, setF64, setI32 } from './access';
import { factorisePanel, subtractProduct } from './dense';
import {
	depthParity,
	entryFrom,
	entryStart,
	entryTo,
	lastChild,
	heightOf,
	previousSibling,
	panelOf,
	relative,
	rowStart,
	start,
	updateStart,
	values,
	widthOf
} from './factor';

/**
 * Update matrices that wait for their parent lie on two stacks, those of even and of odd depth in
 * the tree: a parent's is built on one while its children's are read from the other, and nothing is
 * moved. Bytes; each caller has two stacks of its own.
 */
let evenBase: usize = 0;
let oddBase: usize = 0;
let evenTop: usize = 0;
let oddTop: usize = 0;
let scratch: usize = 0;

/** Tells where the caller's stacks begin, and its DENSE_SCRATCH_BYTES. */
export function bindStacks(evenAt: usize, oddAt: usize, scratchAt: usize): void {
	evenBase = evenTop = evenAt;
	oddBase = oddTop = oddAt;
	scratch = scratchAt;
}

/**
 * Factors the supernodes from `from` to before `to`; their children outside the range are done and
 * their update matrices wait wherever they were made.
 *
 * @returns -1, or the column (new numbering) whose pivot is not a positive finite number
 */
export function factoriseRange(from: i32, to: i32): i32 {
	for (let s = from; s < to; s++) {
		const width = widthOf(s);
		const height = heightOf(s);
		const below = height - width;
		const panel = panelOf(s);
		const isOdd = load<u8>(depthParity + s) != 0;
		const update = isOdd ? oddTop : evenTop;
		memory.fill(panel, 0, <usize>width * doubles(height));
		loadEntries(s, panel);
		clearLower(update, below);
		const childBase = isOdd ? evenBase : oddBase;
		let childTop = isOdd ? evenTop : oddTop;
		for (let child = getI32(lastChild, s); child != -1; child = getI32(previousSibling, child)) {
			const source = <usize>getI32(updateStart, child);
			addUpdate(child, source, panel, width, update, below);
			// One that another caller made lies on no stack of this one.
			if (source >= childBase && source < childTop) childTop = source;
		}
		if (isOdd) evenTop = childTop;
		else oddTop = childTop;
		const failed = factorisePanel(panel, width, height, scratch);
		if (failed != -1) return getI32(start, s) + failed;
		if (below == 0) continue;
		const square = panel + <usize>width * doubles(width);
		subtractProduct(update, doubles(below), square, doubles(width), below, below, width);
		setI32(updateStart, s, <i32>update);
		const top = update + <usize>below * doubles(below);
		if (isOdd) oddTop = top;
		else evenTop = top;
	}
	return -1;
}

/** Loads the matrix's entries into a panel. */
function loadEntries(s: i32, panel: usize): void {
	const end = getI32(entryStart, s + 1);
	for (let p = getI32(entryStart, s); p < end; p++) {
		setF64(panel, getI32(entryTo, p), getF64(values, getI32(entryFrom, p)));
	}
}

/** Clears the lower triangle of a square matrix, and what kernels may touch right of it. */
function clearLower(matrix: usize, size: i32): void {
	let row = matrix;
	for (let i = 0; i < size; i++) {
		memory.fill(row, 0, doubles(min(i + 4, size)));
		row += doubles(size);
	}
}

/**
 * Adds a child's update matrix into its parent's panel and update matrix. Neighbouring rows of the
 * child are mostly neighbours in the parent too, so it is added in runs of columns whose places
 * follow each other; within a run all rows below it have one length, which a processor foretells.
 */
function addUpdate(
	child: i32,
	source: usize,
	panel: usize,
	width: i32,
	update: usize,
	below: i32
): void {
	const first = getI32(rowStart, child) + widthOf(child);
	const size = getI32(rowStart, child + 1) - first;
	const places = relative + ((<usize>first) << 2);
	const stride = doubles(size);
	let begin = 0;
	while (begin < size) {
		const place = getI32(places, begin);
		let end = begin + 1;
		while (end < size) {
			const next = place + end - begin;
			if (getI32(places, end) != next || next == width) break;
			end++;
		}
		const isPanel = place < width;
		const toStride = doubles(isPanel ? width : below);
		// Where row 0, column 0 of the parent would lie, had the target one.
		const target = isPanel ? panel : update - <usize>width * (toStride + 8);
		const to = target + doubles(place);
		let from = source + doubles(begin) + <usize>begin * stride;
		for (let i = begin; i < end; i++) {
			addRow(to + <usize>getI32(places, i) * toStride, from, doubles(i - begin + 1));
			from += stride;
		}
		const bytes = doubles(end - begin);
		for (let i = end; i < size; i++) {
			addRow(to + <usize>getI32(places, i) * toStride, from, bytes);
			from += stride;
		}
		begin = end;
	}
}

function addRow(to: usize, from: usize, bytes: usize): void {
	let k: usize = 0;
	for (; k + 16 <= bytes; k += 16) {
		v128.store(to + k, f64x2.add(v128.load(to + k), v128.load(from + k)));
	}
	if (k < bytes) store<f64>(to + k, load<f64>(to + k) + load<f64>(from + k));
}
