/**
 * Dense kernels on row-major panels. Rows are contiguous, so each update is a set of dot products
 * over two rows; they are unrolled over four rows by two columns, which is what a JavaScript engine
 * keeps in registers. Offsets are int32: an engine computes addresses in doubles otherwise.
 */

/** Columns factored at once; wider panels are updated in blocks of this many. */
const BLOCK = 24;

/**
 * Cholesky factorisation in place of the first `width` columns of a row-major panel of `height`
 * rows: the top square becomes L (its upper corner is left undefined), the rows below are divided
 * by L^T.
 *
 * @returns -1, or the column whose pivot is not a positive finite number
 */
export function factorisePanel(
	panel: Float64Array,
	offset: number,
	width: number,
	height: number
): number {
	for (let first = 0; first < width; first += BLOCK) {
		const last = Math.min(first + BLOCK, width);
		const corner = offset + first * width;
		if (first > 0) {
			const rows = height - first;
			const columns = last - first;
			subtractProduct(panel, corner + first, width, panel, corner, width, rows, columns, first);
		}
		const failed = factoriseSquare(panel, corner + first, width, last - first);
		if (failed !== -1) return first + failed;
		divideRows(
			panel,
			corner + first,
			offset + last * width + first,
			width,
			last - first,
			height - last
		);
	}
	return -1;
}

/** Cholesky factorisation of the square of `size` columns at `corner`; result as above. */
function factoriseSquare(
	panel: Float64Array,
	corner: number,
	stride: number,
	size: number
): number {
	for (let i = 0; i < size; i++) {
		const row = corner + i * stride;
		for (let j = 0; j < i; j++) {
			const other = corner + j * stride;
			let sum = panel[row + j];
			for (let k = 0; k < j; k++) sum -= panel[row + k] * panel[other + k];
			panel[row + j] = sum / panel[other + j];
		}
		let pivot = panel[row + i];
		for (let k = 0; k < i; k++) pivot -= panel[row + k] * panel[row + k];
		if (!(pivot > 0 && pivot < Infinity)) return i;
		panel[row + i] = Math.sqrt(pivot);
	}
	return -1;
}

/** Divides `rows` rows from `target` on by L^T, where L is the square of `size` columns at `corner`. */
function divideRows(
	panel: Float64Array,
	corner: number,
	target: number,
	stride: number,
	size: number,
	rows: number
): void {
	let i = 0;
	for (; i + 4 <= rows; i += 4) {
		const row0 = target + i * stride;
		const row1 = row0 + stride;
		const row2 = row1 + stride;
		const row3 = row2 + stride;
		for (let j = 0; j < size; j++) {
			const other = corner + j * stride;
			let s0 = panel[row0 + j];
			let s1 = panel[row1 + j];
			let s2 = panel[row2 + j];
			let s3 = panel[row3 + j];
			for (let k = 0; k < j; k++) {
				const l = panel[other + k];
				s0 -= panel[row0 + k] * l;
				s1 -= panel[row1 + k] * l;
				s2 -= panel[row2 + k] * l;
				s3 -= panel[row3 + k] * l;
			}
			const pivot = panel[other + j];
			panel[row0 + j] = s0 / pivot;
			panel[row1 + j] = s1 / pivot;
			panel[row2 + j] = s2 / pivot;
			panel[row3 + j] = s3 / pivot;
		}
	}
	for (; i < rows; i++) {
		const row = target + i * stride;
		for (let j = 0; j < size; j++) {
			const other = corner + j * stride;
			let sum = panel[row + j];
			for (let k = 0; k < j; k++) sum -= panel[row + k] * panel[other + k];
			panel[row + j] = sum / panel[other + j];
		}
	}
}

/**
 * C = C - B D^T on the lower trapezoid of C (row i holds columns 0 .. i): B are `rows` rows of
 * `depth` values at `source`, D the first `columns` of them. Up to three entries right of each
 * row's diagonal, within the row's columns, may be overwritten.
 */
export function subtractProduct(
	target: Float64Array,
	targetOffset: number,
	targetStride: number,
	panel: Float64Array,
	source: number,
	stride: number,
	rows: number,
	columns: number,
	depth: number
): void {
	let i = 0;
	for (; i + 4 <= rows; i += 4) {
		const row0 = source + i * stride;
		const row1 = row0 + stride;
		const row2 = row1 + stride;
		const row3 = row2 + stride;
		const to0 = targetOffset + i * targetStride;
		const to1 = to0 + targetStride;
		const to2 = to1 + targetStride;
		const to3 = to2 + targetStride;
		const stop = i + 4 < columns ? i + 4 : columns;
		let j = 0;
		for (; j + 2 <= stop; j += 2) {
			const column0 = source + j * stride;
			const column1 = column0 + stride;
			let s00 = 0;
			let s01 = 0;
			let s10 = 0;
			let s11 = 0;
			let s20 = 0;
			let s21 = 0;
			let s30 = 0;
			let s31 = 0;
			for (let k = 0; k < depth; k++) {
				const b0 = panel[column0 + k];
				const b1 = panel[column1 + k];
				const a0 = panel[row0 + k];
				s00 += a0 * b0;
				s01 += a0 * b1;
				const a1 = panel[row1 + k];
				s10 += a1 * b0;
				s11 += a1 * b1;
				const a2 = panel[row2 + k];
				s20 += a2 * b0;
				s21 += a2 * b1;
				const a3 = panel[row3 + k];
				s30 += a3 * b0;
				s31 += a3 * b1;
			}
			target[to0 + j] -= s00;
			target[to0 + j + 1] -= s01;
			target[to1 + j] -= s10;
			target[to1 + j + 1] -= s11;
			target[to2 + j] -= s20;
			target[to2 + j + 1] -= s21;
			target[to3 + j] -= s30;
			target[to3 + j + 1] -= s31;
		}
		// An odd number of columns leaves one.
		for (; j < stop; j++) {
			const column = source + j * stride;
			let s0 = 0;
			let s1 = 0;
			let s2 = 0;
			let s3 = 0;
			for (let k = 0; k < depth; k++) {
				const b = panel[column + k];
				s0 += panel[row0 + k] * b;
				s1 += panel[row1 + k] * b;
				s2 += panel[row2 + k] * b;
				s3 += panel[row3 + k] * b;
			}
			target[to0 + j] -= s0;
			target[to1 + j] -= s1;
			target[to2 + j] -= s2;
			target[to3 + j] -= s3;
		}
	}
	for (; i < rows; i++) {
		const row = source + i * stride;
		const to = targetOffset + i * targetStride;
		const stop = i + 1 < columns ? i + 1 : columns;
		for (let j = 0; j < stop; j++) {
			const column = source + j * stride;
			let sum = 0;
			for (let k = 0; k < depth; k++) sum += panel[row + k] * panel[column + k];
			target[to + j] -= sum;
		}
	}
}
