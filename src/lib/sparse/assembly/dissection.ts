/**
 * Geometric nested dissection; what it does is told at its caller (../nested-dissection.ts). Places
 * are kept in quanta, x and y of a node in one word, so that a part is read and sorted quickly; a
 * part that gets too small for its quanta is measured anew.
 */
import { getI32, setI32 } from './access';

/** Parts of at most this many nodes are one dense piece: smaller cuts save no work. */
const LEAF_NODES: i32 = 16;
/** Quanta along the longer side of a part that was just measured. */
const QUANTA: f64 = 65535;
/** A part of fewer quanta than this is measured anew. */
const LEAST_QUANTA: i32 = 64;
/** Most and least buckets in which a part's nodes are counted to find its middle. */
const MOST_BUCKETS: i32 = 1024;
const LEAST_BUCKETS: i32 = 16;

/** Matrix pattern: rows by `rowStart` (int32, n + 1) in `column` (int32). */
let rowStart: usize = 0;
let column: usize = 0;
/** Coordinates of each node, float64. */
let x: usize = 0;
let y: usize = 0;
/** Nodes by new position, int32: a part is a run of it. */
let order: usize = 0;
/** Quanta by new position and by node, uint32: x in the low half, y in the high half. */
let orderedPlace: usize = 0;
let placeOf: usize = 0;
/** Nodes and quanta of the high side, and from the far end of the separator, while a part is sorted. */
let waiting: usize = 0;
let waitingPlace: usize = 0;
/** 1 once a node belongs to a separator, uint8: it no longer joins its neighbours. */
let isSeparated: usize = 0;
/** Counts of MOST_BUCKETS buckets, int32. */
let counts: usize = 0;
/** First position and parent of each piece, int32; pieces that have no parent yet, int32. */
let pieceStart: usize = 0;
let pieceParent: usize = 0;
let orphans: usize = 0;
let pieces: i32 = 0;
let orphanCount: i32 = 0;

/** Longest edge of the part at hand along each axis, quanta. */
let reachX: i32 = 0;
let reachY: i32 = 0;

/** Bytes of working space per node, and on top of that. */
export const DISSECTION_BYTES_PER_NODE: i32 = 4 * 6 + 1;
export const DISSECTION_BYTES: i32 = 4 * MOST_BUCKETS + 64;

/**
 * Orders n > 0 nodes.
 *
 * @param work DISSECTION_BYTES_PER_NODE * n + DISSECTION_BYTES of space
 * @param startAt of the pieces, space for n + 1
 * @param parentAt of the pieces, space for n, filled with -1
 * @returns the number of pieces
 */
export function orderByPlace(
	n: i32,
	rowStartAt: usize,
	columnAt: usize,
	xAt: usize,
	yAt: usize,
	orderAt: usize,
	startAt: usize,
	parentAt: usize,
	work: usize
): i32 {
	const bytes = (<usize>n) << 2;
	rowStart = rowStartAt;
	column = columnAt;
	x = xAt;
	y = yAt;
	order = orderAt;
	pieceStart = startAt;
	pieceParent = parentAt;
	orderedPlace = work;
	placeOf = work + bytes;
	waiting = work + 2 * bytes;
	waitingPlace = work + 3 * bytes;
	orphans = work + 4 * bytes;
	counts = work + 5 * bytes;
	isSeparated = counts + ((<usize>MOST_BUCKETS) << 2);
	memory.fill(isSeparated, 0, n);
	for (let k = 0; k < n; k++) setI32(order, k, k);
	pieces = 0;
	orphanCount = 0;
	measure(0, n);
	dissect(0, n);
	setI32(pieceStart, pieces, n);
	return pieces;
}

function distance(a: i32, b: i32): i32 {
	return a > b ? a - b : b - a;
}

/** Gives the nodes of a part quanta of its own bounding box, and finds its longest edges. */
function measure(begin: i32, end: i32): void {
	let minX: f64 = Infinity;
	let maxX: f64 = -Infinity;
	let minY: f64 = Infinity;
	let maxY: f64 = -Infinity;
	for (let k = begin; k < end; k++) {
		const at = (<usize>getI32(order, k)) << 3;
		const xk = load<f64>(x + at);
		const yk = load<f64>(y + at);
		minX = min(minX, xk);
		maxX = max(maxX, xk);
		minY = min(minY, yk);
		maxY = max(maxY, yk);
	}
	const length = max(maxX - minX, maxY - minY);
	const scale = length > 0 ? QUANTA / length : 0;
	for (let k = begin; k < end; k++) {
		const i = getI32(order, k);
		const at = (<usize>i) << 3;
		const place =
			(<i32>((load<f64>(x + at) - minX) * scale)) |
			((<i32>((load<f64>(y + at) - minY) * scale)) << 16);
		setI32(orderedPlace, k, place);
		setI32(placeOf, i, place);
	}
	reachX = 0;
	reachY = 0;
	for (let k = begin; k < end; k++) {
		const i = getI32(order, k);
		const place = getI32(placeOf, i);
		for (let p = getI32(rowStart, i); p < getI32(rowStart, i + 1); p++) {
			const j = getI32(column, p);
			// Each edge once; an edge out of the part leads to a separator.
			if (j <= i || load<u8>(isSeparated + j)) continue;
			const other = getI32(placeOf, j);
			reachX = max(reachX, distance(place & 0xffff, other & 0xffff));
			reachY = max(reachY, distance(place >>> 16, other >>> 16));
		}
	}
}

/** Orders the part from `begin` to before `end` and adds its pieces. */
function dissect(begin: i32, end: i32): void {
	if (end - begin <= LEAF_NODES) {
		addPiece(begin, end, orphanCount);
		return;
	}
	let minX: i32 = 0xffff;
	let maxX: i32 = 0;
	let minY: i32 = 0xffff;
	let maxY: i32 = 0;
	for (let k = begin; k < end; k++) {
		const place = getI32(orderedPlace, k);
		const xk = place & 0xffff;
		const yk = place >>> 16;
		minX = min(minX, xk);
		maxX = max(maxX, xk);
		minY = min(minY, yk);
		maxY = max(maxY, yk);
	}
	const length = max(maxX - minX, maxY - minY);
	if (length < LEAST_QUANTA) {
		const outerX = reachX;
		const outerY = reachY;
		measure(begin, end);
		if (isAtOnePlace(begin, end)) addPiece(begin, end, orphanCount);
		else dissect(begin, end);
		reachX = outerX;
		reachY = outerY;
		return;
	}
	const isAlongX = maxX - minX >= maxY - minY;
	const orphansBefore = orphanCount;
	const cut = middleOf(begin, end, isAlongX ? 0 : 16, isAlongX ? minX : minY, length);
	split(begin, end, isAlongX ? 0 : 16, cut, cut - (isAlongX ? reachX : reachY));
	const high = highBegin;
	const separator = separatorBegin;
	if (high > begin) dissect(begin, high);
	if (separator > high) dissect(high, separator);
	addPiece(separator, end, orphansBefore);
}

/** Whether the nodes of a part that was just measured cannot be told apart by their places. */
function isAtOnePlace(begin: i32, end: i32): bool {
	const place = getI32(orderedPlace, begin);
	for (let k = begin + 1; k < end; k++) if (getI32(orderedPlace, k) != place) return false;
	return true;
}

/** A run of positions becomes a piece, if it holds any; the orphans from `firstOrphan` on are its own. */
function addPiece(begin: i32, end: i32, firstOrphan: i32): void {
	if (begin == end) return;
	const piece = pieces++;
	setI32(pieceStart, piece, begin);
	for (let k = firstOrphan; k < orphanCount; k++) setI32(pieceParent, getI32(orphans, k), piece);
	setI32(orphans, firstOrphan, piece);
	orphanCount = firstOrphan + 1;
}

/**
 * A place such that some nodes lie at or below it and some above, and about as many: the border of
 * two of the buckets in which the nodes are counted.
 *
 * @param shift 0 along x, 16 along y
 */
function middleOf(begin: i32, end: i32, shift: i32, least: i32, length: i32): i32 {
	const size = end - begin;
	const most = max(LEAST_BUCKETS, min(MOST_BUCKETS, size >> 2));
	let width = 0;
	while (length >> width >= most) width++;
	const buckets = (length >> width) + 1;
	memory.fill(counts, 0, (<usize>buckets) << 2);
	for (let k = begin; k < end; k++) {
		const at =
			counts + ((<usize>((((getI32(orderedPlace, k) >>> shift) & 0xffff) - least) >> width)) << 2);
		store<i32>(at, load<i32>(at) + 1);
	}
	let below = getI32(counts, 0);
	let bucket = 0;
	// The last bucket holds a node and stays above, as the first one stays below.
	while (bucket + 2 < buckets) {
		const count = getI32(counts, bucket + 1);
		if (2 * below + count > size) break;
		below += count;
		bucket++;
	}
	return least + ((bucket + 1) << width) - 1;
}

/** Where the high side and the separator of the part that was split last begin. */
let highBegin: i32 = 0;
let separatorBegin: i32 = 0;

/**
 * Sorts a part into the low side without its separator, the high side, and the separator.
 *
 * @param inner nodes at or below this place have no edge across the cut
 */
function split(begin: i32, end: i32, shift: i32, cut: i32, inner: i32): void {
	let low = begin;
	let high = 0;
	// Separator nodes wait at the far end.
	let separator = end - begin;
	for (let k = begin; k < end; k++) {
		const i = getI32(order, k);
		const place = getI32(orderedPlace, k);
		const value = (place >>> shift) & 0xffff;
		if (value > inner && value <= cut && isNextToHigh(i, shift, cut)) {
			separator--;
			setI32(waiting, separator, i);
			continue;
		}
		// Written to both sides, kept on one: which one is hard to foretell for a processor.
		setI32(order, low, i);
		setI32(orderedPlace, low, place);
		setI32(waiting, high, i);
		setI32(waitingPlace, high, place);
		const isHigh = <i32>(value > cut);
		high += isHigh;
		low += 1 - isHigh;
	}
	const bytes = (<usize>high) << 2;
	memory.copy(order + ((<usize>low) << 2), waiting, bytes);
	memory.copy(orderedPlace + ((<usize>low) << 2), waitingPlace, bytes);
	highBegin = low;
	separatorBegin = begin + separator;
	for (let k = separator; k < end - begin; k++) {
		const i = getI32(waiting, k);
		setI32(order, begin + k, i);
		store<u8>(isSeparated + i, 1);
	}
}

/** Whether a node of the low side has a neighbour on the high side. */
function isNextToHigh(i: i32, shift: i32, cut: i32): bool {
	for (let p = getI32(rowStart, i); p < getI32(rowStart, i + 1); p++) {
		const j = getI32(column, p);
		if (((getI32(placeOf, j) >>> shift) & 0xffff) > cut && !load<u8>(isSeparated + j)) return true;
	}
	return false;
}
