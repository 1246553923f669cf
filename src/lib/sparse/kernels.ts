/**
 * Dense kernels on row-major panels. Rows are contiguous, so each update is a set of dot products
 * over two rows; they are unrolled over two rows by two columns, which is what a JavaScript engine
 * keeps in registers.
 */

/** Columns factored at once; wider panels are updated in blocks of this many. */
const BLOCK = 32;

/**
 * Cholesky factorisation in place of the first `width` columns of a row-major panel of `height`
 * rows: the top square becomes L (its upper corner is left as it was), the rows below are divided
 * by L^T.
 *
 * @returns -1, or the column whose pivot is not positive
 */
export function factorisePanel(
	panel: Float64Array,
	offset: number,
	width: number,
	height: number
): number {
	for (let first = 0; first < width; first += BLOCK) {
		const last = Math.min(first + BLOCK, width);
		if (first > 0) updateColumns(panel, offset, width, height, first, last);
		for (let i = first; i < height; i++) {
			const row = offset + i * width;
			const stop = Math.min(i + 1, last);
			for (let j = first; j < stop; j++) {
				const other = offset + j * width;
				let sum = panel[row + j];
				for (let k = first; k < j; k++) sum -= panel[row + k] * panel[other + k];
				if (i === j) {
					if (!(sum > 0)) return j;
					panel[row + j] = Math.sqrt(sum);
				} else {
					panel[row + j] = sum / panel[other + j];
				}
			}
		}
	}
	return -1;
}

/** Subtracts what columns 0 .. first - 1 contribute to columns first .. last - 1, from row `first` on. */
function updateColumns(
	panel: Float64Array,
	offset: number,
	width: number,
	height: number,
	first: number,
	last: number
): void {
	for (let i = first; i < height; i += 2) {
		const row0 = offset + i * width;
		const hasPair = i + 1 < height;
		const row1 = hasPair ? row0 + width : row0;
		// Entries above the diagonal may be computed along with their pair: nobody reads them.
		const stop = Math.min(i + 2, last);
		for (let j = first; j < stop; j += 2) {
			const column0 = offset + j * width;
			const column1 = j + 1 < last ? column0 + width : column0;
			let s00 = 0;
			let s01 = 0;
			let s10 = 0;
			let s11 = 0;
			for (let k = 0; k < first; k++) {
				const a0 = panel[row0 + k];
				const a1 = panel[row1 + k];
				const b0 = panel[column0 + k];
				const b1 = panel[column1 + k];
				s00 += a0 * b0;
				s01 += a0 * b1;
				s10 += a1 * b0;
				s11 += a1 * b1;
			}
			panel[row0 + j] -= s00;
			if (hasPair) panel[row1 + j] -= s10;
			if (j + 1 < last) {
				panel[row0 + j + 1] -= s01;
				if (hasPair) panel[row1 + j + 1] -= s11;
			}
		}
	}
}

/**
 * update = update - B B^T on the lower triangle, where B is the panel without its top square:
 * `below` rows of `width` columns. `update` is row-major with `below` columns; entries just above
 * its diagonal may be overwritten.
 */
export function subtractOuterProduct(
	update: Float64Array,
	panel: Float64Array,
	offset: number,
	width: number,
	below: number
): void {
	const base = offset + width * width;
	for (let i = 0; i < below; i += 2) {
		const row0 = base + i * width;
		const hasPair = i + 1 < below;
		const row1 = hasPair ? row0 + width : row0;
		const target0 = i * below;
		const target1 = target0 + below;
		for (let j = 0; j <= i; j += 2) {
			const column0 = base + j * width;
			const column1 = j + 1 < below ? column0 + width : column0;
			let s00 = 0;
			let s01 = 0;
			let s10 = 0;
			let s11 = 0;
			for (let k = 0; k < width; k++) {
				const a0 = panel[row0 + k];
				const a1 = panel[row1 + k];
				const b0 = panel[column0 + k];
				const b1 = panel[column1 + k];
				s00 += a0 * b0;
				s01 += a0 * b1;
				s10 += a1 * b0;
				s11 += a1 * b1;
			}
			update[target0 + j] -= s00;
			if (j + 1 < below) update[target0 + j + 1] -= s01;
			if (hasPair) {
				update[target1 + j] -= s10;
				update[target1 + j + 1] -= s11;
			}
		}
	}
}
