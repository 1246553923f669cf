/**
 * Dense kernels on row-major panels, two doubles at a time (WebAssembly SIMD). Offsets and strides
 * are bytes. Rows are contiguous, so each update is a set of dot products over two rows; four rows
 * by two columns of sums are what sixteen vector registers hold beside their operands.
 */

/** Columns factored at once; wider panels are updated in blocks of this many. */
const BLOCK: i32 = 16;
/** Bytes of a double. */
const F64: usize = 8;

/** Scratch of `factorisePanel`: four rows of a block as columns of four, then one column of a block. */
export const DENSE_SCRATCH_BYTES: usize = (4 * BLOCK + BLOCK) * 8;

function sumsOf(left: v128, right: v128): v128 {
	return f64x2.add(v128.shuffle<f64>(left, right, 0, 2), v128.shuffle<f64>(left, right, 1, 3));
}

/**
 * C = C - B D^T on the lower trapezoid of C: row i holds columns 0 .. i but no more than `columns`.
 * B are `rows` rows of `depth` doubles from `source`, D the first `columns` of them. Up to three
 * entries right of each row's diagonal, within the row's columns, may be overwritten.
 */
export function subtractProduct(
	target: usize,
	targetStride: usize,
	source: usize,
	stride: usize,
	rows: i32,
	columns: i32,
	depth: i32
): void {
	const pairs: usize = ((<usize>depth) >> 1) << 4;
	const isOdd = (depth & 1) != 0;
	let i = 0;
	for (; i + 4 <= rows; i += 4) {
		const row0 = source + <usize>i * stride;
		const row1 = row0 + stride;
		const row2 = row1 + stride;
		const row3 = row2 + stride;
		const to0 = target + <usize>i * targetStride;
		const to1 = to0 + targetStride;
		const to2 = to1 + targetStride;
		const to3 = to2 + targetStride;
		const stop = i + 4 < columns ? i + 4 : columns;
		let j = 0;
		for (; j + 2 <= stop; j += 2) {
			const column0 = source + <usize>j * stride;
			const column1 = column0 + stride;
			let s00 = f64x2.splat(0);
			let s01 = f64x2.splat(0);
			let s10 = f64x2.splat(0);
			let s11 = f64x2.splat(0);
			let s20 = f64x2.splat(0);
			let s21 = f64x2.splat(0);
			let s30 = f64x2.splat(0);
			let s31 = f64x2.splat(0);
			for (let k: usize = 0; k < pairs; k += 16) {
				const b0 = v128.load(column0 + k);
				const b1 = v128.load(column1 + k);
				const a0 = v128.load(row0 + k);
				s00 = f64x2.add(s00, f64x2.mul(a0, b0));
				s01 = f64x2.add(s01, f64x2.mul(a0, b1));
				const a1 = v128.load(row1 + k);
				s10 = f64x2.add(s10, f64x2.mul(a1, b0));
				s11 = f64x2.add(s11, f64x2.mul(a1, b1));
				const a2 = v128.load(row2 + k);
				s20 = f64x2.add(s20, f64x2.mul(a2, b0));
				s21 = f64x2.add(s21, f64x2.mul(a2, b1));
				const a3 = v128.load(row3 + k);
				s30 = f64x2.add(s30, f64x2.mul(a3, b0));
				s31 = f64x2.add(s31, f64x2.mul(a3, b1));
			}
			if (isOdd) {
				// One double in a vector whose other half is zero.
				const b0 = v128.load64_zero(column0 + pairs);
				const b1 = v128.load64_zero(column1 + pairs);
				const a0 = v128.load64_zero(row0 + pairs);
				s00 = f64x2.add(s00, f64x2.mul(a0, b0));
				s01 = f64x2.add(s01, f64x2.mul(a0, b1));
				const a1 = v128.load64_zero(row1 + pairs);
				s10 = f64x2.add(s10, f64x2.mul(a1, b0));
				s11 = f64x2.add(s11, f64x2.mul(a1, b1));
				const a2 = v128.load64_zero(row2 + pairs);
				s20 = f64x2.add(s20, f64x2.mul(a2, b0));
				s21 = f64x2.add(s21, f64x2.mul(a2, b1));
				const a3 = v128.load64_zero(row3 + pairs);
				s30 = f64x2.add(s30, f64x2.mul(a3, b0));
				s31 = f64x2.add(s31, f64x2.mul(a3, b1));
			}
			const at = <usize>j * F64;
			v128.store(to0 + at, f64x2.sub(v128.load(to0 + at), sumsOf(s00, s01)));
			v128.store(to1 + at, f64x2.sub(v128.load(to1 + at), sumsOf(s10, s11)));
			v128.store(to2 + at, f64x2.sub(v128.load(to2 + at), sumsOf(s20, s21)));
			v128.store(to3 + at, f64x2.sub(v128.load(to3 + at), sumsOf(s30, s31)));
		}
		// An odd number of columns leaves one.
		if (j < stop) {
			subtractDots(to0 + <usize>j * F64, row0, source, stride, j, stop, pairs, isOdd);
			subtractDots(to1 + <usize>j * F64, row1, source, stride, j, stop, pairs, isOdd);
			subtractDots(to2 + <usize>j * F64, row2, source, stride, j, stop, pairs, isOdd);
			subtractDots(to3 + <usize>j * F64, row3, source, stride, j, stop, pairs, isOdd);
		}
	}
	for (; i < rows; i++) {
		const row = source + <usize>i * stride;
		const to = target + <usize>i * targetStride;
		const stop = i + 1 < columns ? i + 1 : columns;
		subtractDots(to, row, source, stride, 0, stop, pairs, isOdd);
	}
}

/** Subtracts the dot products of one row with rows `from` .. `stop` of D from the entries at `to`. */
function subtractDots(
	to: usize,
	row: usize,
	source: usize,
	stride: usize,
	from: i32,
	stop: i32,
	pairs: usize,
	isOdd: bool
): void {
	for (let j = from; j < stop; j++) {
		const column = source + <usize>j * stride;
		let sums = f64x2.splat(0);
		for (let k: usize = 0; k < pairs; k += 16) {
			sums = f64x2.add(sums, f64x2.mul(v128.load(row + k), v128.load(column + k)));
		}
		let sum = f64x2.extract_lane(sums, 0) + f64x2.extract_lane(sums, 1);
		if (isOdd) sum += load<f64>(row + pairs) * load<f64>(column + pairs);
		store<f64>(to, load<f64>(to) - sum);
		to += F64;
	}
}

/**
 * Cholesky factorisation in place of the first `width` columns of a panel of `height` rows: the top
 * square becomes L (its upper corner is left undefined), the rows below are divided by L^T.
 *
 * @param scratch DENSE_SCRATCH_BYTES of working space
 * @returns -1, or the column whose pivot is not a positive finite number
 */
export function factorisePanel(panel: usize, width: i32, height: i32, scratch: usize): i32 {
	const stride = <usize>width * F64;
	for (let first = 0; first < width; first += BLOCK) {
		const last = first + BLOCK < width ? first + BLOCK : width;
		const size = last - first;
		const rows = panel + <usize>first * stride;
		const corner = rows + <usize>first * F64;
		if (first > 0) subtractProduct(corner, stride, rows, stride, height - first, size, first);
		const failed = factoriseSquare(corner, stride, size, scratch);
		if (failed != -1) return first + failed;
		divideRows(corner, stride, size, height - last, scratch);
	}
	return -1;
}

/** Cholesky factorisation of the square of `size` columns at `corner`, column by column to the right. */
function factoriseSquare(corner: usize, stride: usize, size: i32, scratch: usize): i32 {
	for (let k = 0; k < size; k++) {
		const top = corner + <usize>k * (stride + F64);
		const pivot = load<f64>(top);
		if (!(pivot > 0 && pivot < Infinity)) return k;
		const root = sqrt<f64>(pivot);
		store<f64>(top, root);
		const inverse = 1 / root;
		// Column k of L, contiguous: entry j of the square at scratch + j.
		let entry = top;
		for (let i = k + 1; i < size; i++) {
			entry += stride;
			const value = load<f64>(entry) * inverse;
			store<f64>(entry, value);
			store<f64>(scratch + <usize>i * F64, value);
		}
		entry = top;
		for (let i = k + 1; i < size; i++) {
			entry += stride;
			const factor = load<f64>(entry);
			const row = entry - <usize>k * F64;
			const splat = f64x2.splat(factor);
			let j = k + 1;
			for (; j + 1 <= i; j += 2) {
				const at = <usize>j * F64;
				v128.store(
					row + at,
					f64x2.sub(v128.load(row + at), f64x2.mul(splat, v128.load(scratch + at)))
				);
			}
			if (j <= i) {
				const at = <usize>j * F64;
				store<f64>(row + at, load<f64>(row + at) - factor * load<f64>(scratch + at));
			}
		}
	}
	return -1;
}

/**
 * Divides the `rows` rows below the square of `size` columns at `corner` by L^T: four rows at once,
 * held as columns of four in the scratch space.
 */
function divideRows(corner: usize, stride: usize, size: i32, rows: i32, scratch: usize): void {
	const inverses = scratch + <usize>(4 * BLOCK) * F64;
	for (let j = 0; j < size; j++) {
		store<f64>(inverses + <usize>j * F64, 1 / load<f64>(corner + <usize>j * (stride + F64)));
	}
	let row0 = corner + <usize>size * stride;
	for (let i = 0; i < rows; i += 4) {
		// Rows that are missing in the last group repeat the last one; they get its values again.
		const left = rows - i;
		const row1 = left > 1 ? row0 + stride : row0;
		const row2 = left > 2 ? row1 + stride : row1;
		const row3 = left > 3 ? row2 + stride : row2;
		let lPointer = corner;
		for (let j = 0; j < size; j++) {
			const at = <usize>j * F64;
			let low = f64x2.replace_lane(v128.load64_zero(row0 + at), 1, load<f64>(row1 + at));
			let high = f64x2.replace_lane(v128.load64_zero(row2 + at), 1, load<f64>(row3 + at));
			let x = scratch;
			for (let k: usize = 0; k < at; k += F64) {
				const l = v128.load64_splat(lPointer + k);
				low = f64x2.sub(low, f64x2.mul(l, v128.load(x)));
				high = f64x2.sub(high, f64x2.mul(l, v128.load(x, 16)));
				x += 32;
			}
			const inverse = v128.load64_splat(inverses + at);
			v128.store(x, f64x2.mul(low, inverse));
			v128.store(x, f64x2.mul(high, inverse), 16);
			lPointer += stride;
		}
		let x = scratch;
		for (let at: usize = 0; at < <usize>size * F64; at += F64) {
			// The last row first, so that a repeated row ends with the value of its own lane.
			store<f64>(row3 + at, load<f64>(x, 24));
			store<f64>(row2 + at, load<f64>(x, 16));
			store<f64>(row1 + at, load<f64>(x, 8));
			store<f64>(row0 + at, load<f64>(x));
			x += 32;
		}
		row0 += 4 * stride;
	}
}
