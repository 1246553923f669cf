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
		let row = panelOf(s);
		for (let i = 0; i < height; i++) {
			const at = y + ((<usize>getI32(list, i)) << LANES_SHIFT);
			const isOwn = i < width;
			subtractDotLanes(at, row, own, isOwn ? i : width);
			if (isOwn) scaleLanes(at, 1 / getF64(row, i));
			row += doubles(width);
		}
	}
}

/** y = L^-T y in all lanes. */
export function backwardLanes(from: i32, to: i32, y: usize): void {
	for (let s = to - 1; s >= from; s--) {
		const width = widthOf(s);
		const list = rows + ((<usize>getI32(rowStart, s)) << 2);
		const own = y + ((<usize>getI32(start, s)) << LANES_SHIFT);
		let row = panelOf(s) + <usize>heightOf(s) * doubles(width);
		for (let i = heightOf(s) - 1; i >= 0; i--) {
			row -= doubles(width);
			const at = y + ((<usize>getI32(list, i)) << LANES_SHIFT);
			const isOwn = i < width;
			if (isOwn) scaleLanes(at, 1 / getF64(row, i));
			subtractScaledLanes(own, row, at, isOwn ? i : width);
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
function subtractDotLanes(at: usize, row: usize, own: usize, count: i32): void {
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

/** Sum of the products of `count` doubles. */
export function dotProduct(a: usize, b: usize, count: i32): f64 {
	return dot(a, b, count);
}
