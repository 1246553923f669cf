/**
 * Forward and backward substitution over ranges of supernodes. `y` holds doubles in the new
 * numbering: one of each unknown, or LANES of each for as many right-hand sides at once, so that the
 * factor is read once for all of them.
 */
import { doubles, getF64, getI32, setF64 } from './access';
import { heightOf, panelOf, parent, rows, rowStart, start, widthOf } from './factor';

/** y = L^-1 y. */
export function forward(from: i32, to: i32, y: usize): void {
	for (let s = from; s < to; s++) forwardPanel(s, y);
}

/**
 * y = L^-1 y where y is nonzero only at unknowns of supernode s: its answer is nonzero only on the
 * way from s to the root (J. R. Gilbert, SIAM J. Matrix Anal. Appl. 15 (1994) 62).
 */
export function forwardPath(s: i32, y: usize): void {
	for (; s != -1; s = getI32(parent, s)) forwardPanel(s, y);
}

/** y = L^-T y. */
export function backward(from: i32, to: i32, y: usize): void {
	for (let s = to - 1; s >= from; s--) backwardPanel(s, y);
}

function dot(a: usize, b: usize, count: i32): f64 {
	const pairs = doubles(count & ~1);
	let sums = f64x2.splat(0);
	for (let k: usize = 0; k < pairs; k += 16) {
		sums = f64x2.add(sums, f64x2.mul(v128.load(a + k), v128.load(b + k)));
	}
	const sum = f64x2.extract_lane(sums, 0) + f64x2.extract_lane(sums, 1);
	return count & 1 ? sum + load<f64>(a + pairs) * load<f64>(b + pairs) : sum;
}

/** target -= factor * source, `count` doubles. */
function subtractScaled(target: usize, source: usize, factor: f64, count: i32): void {
	const pairs = doubles(count & ~1);
	const factors = f64x2.splat(factor);
	for (let k: usize = 0; k < pairs; k += 16) {
		v128.store(
			target + k,
			f64x2.sub(v128.load(target + k), f64x2.mul(v128.load(source + k), factors))
		);
	}
	if (count & 1) {
		store<f64>(target + pairs, load<f64>(target + pairs) - load<f64>(source + pairs) * factor);
	}
}

function forwardPanel(s: i32, y: usize): void {
	const width = widthOf(s);
	const height = heightOf(s);
	const list = rows + ((<usize>getI32(rowStart, s)) << 2);
	const own = y + doubles(getI32(start, s));
	let row = panelOf(s);
	for (let i = 0; i < width; i++) {
		setF64(own, i, (getF64(own, i) - dot(row, own, i)) / getF64(row, i));
		row += doubles(width);
	}
	for (let i = width; i < height; i++) {
		const at = getI32(list, i);
		setF64(y, at, getF64(y, at) - dot(row, own, width));
		row += doubles(width);
	}
}

function backwardPanel(s: i32, y: usize): void {
	const width = widthOf(s);
	const height = heightOf(s);
	const list = rows + ((<usize>getI32(rowStart, s)) << 2);
	const own = y + doubles(getI32(start, s));
	let row = panelOf(s) + <usize>height * doubles(width);
	for (let i = height - 1; i >= width; i--) {
		row -= doubles(width);
		subtractScaled(own, row, getF64(y, getI32(list, i)), width);
	}
	for (let i = width - 1; i >= 0; i--) {
		row -= doubles(width);
		const value = getF64(own, i) / getF64(row, i);
		setF64(own, i, value);
		subtractScaled(own, row, value, i);
	}
}

/** Right-hand sides that pass through the factor together. */
export const LANES: i32 = 8;
/** log2 of the bytes of one unknown's lanes. */
const LANES_SHIFT: usize = 6;

/** y = L^-1 y in all lanes. */
export function forwardLanes(from: i32, to: i32, y: usize): void {
	for (let s = from; s < to; s++) {
		const width = widthOf(s);
		const height = heightOf(s);
		const list = rows + ((<usize>getI32(rowStart, s)) << 2);
		const own = y + ((<usize>getI32(start, s)) << LANES_SHIFT);
		const stride = doubles(width);
		let row = panelOf(s);
		let i = 0;
		for (; i < width; i++) {
			const at = own + ((<usize>i) << LANES_SHIFT);
			subtractDots(at, row, own, i);
			scaleLanes(at, 1 / getF64(row, i));
			row += stride;
		}
		for (; i + 2 <= height; i += 2) {
			const at0 = y + ((<usize>getI32(list, i)) << LANES_SHIFT);
			const at1 = y + ((<usize>getI32(list, i + 1)) << LANES_SHIFT);
			subtractTwoDots(at0, at1, row, row + stride, own, width);
			row += 2 * stride;
		}
		if (i < height) {
			subtractDots(y + ((<usize>getI32(list, i)) << LANES_SHIFT), row, own, width);
		}
	}
}

/** y = L^-T y in all lanes. */
export function backwardLanes(from: i32, to: i32, y: usize): void {
	for (let s = to - 1; s >= from; s--) {
		const width = widthOf(s);
		const height = heightOf(s);
		const list = rows + ((<usize>getI32(rowStart, s)) << 2);
		const own = y + ((<usize>getI32(start, s)) << LANES_SHIFT);
		const stride = doubles(width);
		let row = panelOf(s) + <usize>width * stride;
		let i = width;
		for (; i + 2 <= height; i += 2) {
			const at0 = y + ((<usize>getI32(list, i)) << LANES_SHIFT);
			const at1 = y + ((<usize>getI32(list, i + 1)) << LANES_SHIFT);
			subtractTwoScaled(own, row, row + stride, at0, at1, width);
			row += 2 * stride;
		}
		if (i < height) {
			subtractScaledLanes(own, row, y + ((<usize>getI32(list, i)) << LANES_SHIFT), width);
		}
		row = panelOf(s) + <usize>width * stride;
		for (i = width - 1; i >= 0; i--) {
			row -= stride;
			const at = own + ((<usize>i) << LANES_SHIFT);
			scaleLanes(at, 1 / getF64(row, i));
			subtractScaledLanes(own, row, at, i);
		}
	}
}

function scaleLanes(at: usize, factor: f64): void {
	const factors = f64x2.splat(factor);
	v128.store(at, f64x2.mul(v128.load(at), factors));
	v128.store(at, f64x2.mul(v128.load(at, 16), factors), 16);
	v128.store(at, f64x2.mul(v128.load(at, 32), factors), 32);
	v128.store(at, f64x2.mul(v128.load(at, 48), factors), 48);
}

/** Lanes at `at` less the `count` factors of a row times the lanes of the own unknowns. */
function subtractDots(at: usize, row: usize, own: usize, count: i32): void {
	let s0 = v128.load(at);
	let s1 = v128.load(at, 16);
	let s2 = v128.load(at, 32);
	let s3 = v128.load(at, 48);
	const end = row + doubles(count);
	for (; row < end; row += 8) {
		const l = v128.load64_splat(row);
		s0 = f64x2.sub(s0, f64x2.mul(l, v128.load(own)));
		s1 = f64x2.sub(s1, f64x2.mul(l, v128.load(own, 16)));
		s2 = f64x2.sub(s2, f64x2.mul(l, v128.load(own, 32)));
		s3 = f64x2.sub(s3, f64x2.mul(l, v128.load(own, 48)));
		own += 64;
	}
	v128.store(at, s0);
	v128.store(at, s1, 16);
	v128.store(at, s2, 32);
	v128.store(at, s3, 48);
}

/** The same for two rows: the own unknowns are read once. */
function subtractTwoDots(
	at0: usize,
	at1: usize,
	row0: usize,
	row1: usize,
	own: usize,
	count: i32
): void {
	let s0 = v128.load(at0);
	let s1 = v128.load(at0, 16);
	let s2 = v128.load(at0, 32);
	let s3 = v128.load(at0, 48);
	let t0 = v128.load(at1);
	let t1 = v128.load(at1, 16);
	let t2 = v128.load(at1, 32);
	let t3 = v128.load(at1, 48);
	const bytes = doubles(count);
	for (let k: usize = 0; k < bytes; k += 8) {
		const l = v128.load64_splat(row0 + k);
		const m = v128.load64_splat(row1 + k);
		const v0 = v128.load(own);
		s0 = f64x2.sub(s0, f64x2.mul(l, v0));
		t0 = f64x2.sub(t0, f64x2.mul(m, v0));
		const v1 = v128.load(own, 16);
		s1 = f64x2.sub(s1, f64x2.mul(l, v1));
		t1 = f64x2.sub(t1, f64x2.mul(m, v1));
		const v2 = v128.load(own, 32);
		s2 = f64x2.sub(s2, f64x2.mul(l, v2));
		t2 = f64x2.sub(t2, f64x2.mul(m, v2));
		const v3 = v128.load(own, 48);
		s3 = f64x2.sub(s3, f64x2.mul(l, v3));
		t3 = f64x2.sub(t3, f64x2.mul(m, v3));
		own += 64;
	}
	v128.store(at0, s0);
	v128.store(at0, s1, 16);
	v128.store(at0, s2, 32);
	v128.store(at0, s3, 48);
	v128.store(at1, t0);
	v128.store(at1, t1, 16);
	v128.store(at1, t2, 32);
	v128.store(at1, t3, 48);
}

/** Lanes of the own unknowns less the `count` factors of a row times the lanes at `at`. */
function subtractScaledLanes(own: usize, row: usize, at: usize, count: i32): void {
	const v0 = v128.load(at);
	const v1 = v128.load(at, 16);
	const v2 = v128.load(at, 32);
	const v3 = v128.load(at, 48);
	const end = row + doubles(count);
	for (; row < end; row += 8) {
		const l = v128.load64_splat(row);
		v128.store(own, f64x2.sub(v128.load(own), f64x2.mul(l, v0)));
		v128.store(own, f64x2.sub(v128.load(own, 16), f64x2.mul(l, v1)), 16);
		v128.store(own, f64x2.sub(v128.load(own, 32), f64x2.mul(l, v2)), 32);
		v128.store(own, f64x2.sub(v128.load(own, 48), f64x2.mul(l, v3)), 48);
		own += 64;
	}
}

/** The same for two rows: the own unknowns are read and written once. */
function subtractTwoScaled(
	own: usize,
	row0: usize,
	row1: usize,
	at0: usize,
	at1: usize,
	count: i32
): void {
	const v0 = v128.load(at0);
	const v1 = v128.load(at0, 16);
	const v2 = v128.load(at0, 32);
	const v3 = v128.load(at0, 48);
	const w0 = v128.load(at1);
	const w1 = v128.load(at1, 16);
	const w2 = v128.load(at1, 32);
	const w3 = v128.load(at1, 48);
	const bytes = doubles(count);
	for (let k: usize = 0; k < bytes; k += 8) {
		const l = v128.load64_splat(row0 + k);
		const m = v128.load64_splat(row1 + k);
		const a = f64x2.add(f64x2.mul(l, v0), f64x2.mul(m, w0));
		v128.store(own, f64x2.sub(v128.load(own), a));
		const b = f64x2.add(f64x2.mul(l, v1), f64x2.mul(m, w1));
		v128.store(own, f64x2.sub(v128.load(own, 16), b), 16);
		const c = f64x2.add(f64x2.mul(l, v2), f64x2.mul(m, w2));
		v128.store(own, f64x2.sub(v128.load(own, 32), c), 32);
		const d = f64x2.add(f64x2.mul(l, v3), f64x2.mul(m, w3));
		v128.store(own, f64x2.sub(v128.load(own, 48), d), 48);
		own += 64;
	}
}

/** Sum of the products of `count` doubles. */
export function dotProduct(a: usize, b: usize, count: i32): f64 {
	return dot(a, b, count);
}
