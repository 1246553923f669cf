/** Matrix Market exchange files (R. F. Boisvert, R. Pozo, K. Remington, NISTIR 5935, 1996). */
import { createReadStream, createWriteStream } from 'node:fs';
import { createInterface } from 'node:readline';
import { once } from 'node:events';
import { assembleEntries, type SymmetricMatrix } from '#lib/sparse/index.ts';

/** A file that is not what its name says; the message names file and line. */
export class MatrixFileError extends Error {
	override readonly name = 'MatrixFileError';
}

interface Header {
	readonly isCoordinate: boolean;
	readonly isSymmetric: boolean;
}

function parseHeader(path: string, line: string): Header {
	const [banner, object, format, field, symmetry] = line.trim().toLowerCase().split(/\s+/);
	const isKnown =
		banner === '%%matrixmarket' &&
		object === 'matrix' &&
		(format === 'coordinate' || format === 'array') &&
		(field === 'real' || field === 'integer' || field === 'double') &&
		(symmetry === 'symmetric' || symmetry === 'general');
	if (!isKnown) {
		throw new MatrixFileError(
			`${path}:1: not the header of a real Matrix Market file (expected "%%MatrixMarket matrix coordinate|array real symmetric|general")`
		);
	}
	return { isCoordinate: format === 'coordinate', isSymmetric: symmetry === 'symmetric' };
}

/** Calls back with the numbers of each line that holds some; the first such line is the sizes. */
async function readNumbers(
	path: string,
	onHeader: (header: Header) => void,
	onLine: (numbers: number[], line: number) => void
): Promise<void> {
	const lines = createInterface({ input: createReadStream(path), crlfDelay: Infinity });
	let count = 0;
	for await (const line of lines) {
		count++;
		if (count === 1) {
			onHeader(parseHeader(path, line));
			continue;
		}
		if (line.startsWith('%') || line.trim() === '') continue;
		const numbers = line.trim().split(/\s+/).map(Number);
		if (numbers.some((number) => !Number.isFinite(number))) {
			throw new MatrixFileError(
				`${path}:${count}: "${line.slice(0, 60)}" (expected finite numbers)`
			);
		}
		onLine(numbers, count);
	}
	if (count === 0) throw new MatrixFileError(`${path}: the file is empty`);
}

/**
 * Reads a symmetric matrix. A symmetric file holds one triangle; a general one holds both, and they
 * must agree.
 */
export async function readMatrix(path: string): Promise<SymmetricMatrix> {
	let header: Header = { isCoordinate: true, isSymmetric: true };
	let size: { n: number; entries: number } | undefined;
	let rows = new Int32Array(0);
	let columns = new Int32Array(0);
	let values = new Float64Array(0);
	let stored = 0;
	await readNumbers(
		path,
		(read) => {
			header = read;
			if (!read.isCoordinate) {
				throw new MatrixFileError(`${path}:1: a dense array (expected coordinate format)`);
			}
		},
		(numbers, line) => {
			if (!size) {
				const [n, m, entries] = numbers;
				if (numbers.length !== 3 || n !== m || !numbers.every(isCount) || n > MOST_ROWS) {
					throw new MatrixFileError(
						`${path}:${line}: sizes ${numbers.join(' ')} (expected n n entries)`
					);
				}
				size = { n, entries };
				rows = new Int32Array(entries);
				columns = new Int32Array(entries);
				values = new Float64Array(entries);
				return;
			}
			const { n, entries } = size;
			const [i, j, value] = numbers;
			const isInside = isCount(i) && isCount(j) && i >= 1 && j >= 1 && i <= n && j <= n;
			if (numbers.length !== 3 || !isInside) {
				throw new MatrixFileError(
					`${path}:${line}: "${numbers.join(' ')}" (expected row, column of 1 to ${n}, value)`
				);
			}
			if (stored === entries) {
				throw new MatrixFileError(`${path}:${line}: one entry more than the ${entries} announced`);
			}
			rows[stored] = i - 1;
			columns[stored] = j - 1;
			values[stored++] = value;
		}
	);
	if (!size) throw new MatrixFileError(`${path}: no sizes (expected a line n n entries)`);
	if (stored !== size.entries) {
		throw new MatrixFileError(`${path}: ${stored} entries (expected ${size.entries})`);
	}
	return header.isSymmetric
		? assembleEntries(size.n, rows, columns, values)
		: fromBothTriangles(path, size.n, rows, columns, values);
}

/** Rows of which all indices fit an int32. */
const MOST_ROWS = 2 ** 31 - 2;

function isCount(value: number): boolean {
	return Number.isInteger(value) && value >= 0;
}

/** Symmetric matrix from a file with both triangles, which must agree entry by entry. */
function fromBothTriangles(
	path: string,
	n: number,
	rows: Int32Array,
	columns: Int32Array,
	values: Float64Array
): SymmetricMatrix {
	// Lower entries minus upper ones: nothing is left of a symmetric matrix.
	const difference = assembleEntries(
		n,
		rows,
		columns,
		values.map((value, e) => (rows[e] > columns[e] ? value : -value))
	);
	for (let i = 0; i < n; i++) {
		for (let p = difference.rowStart[i]; p < difference.rowStart[i + 1]; p++) {
			const j = difference.column[p];
			if (j !== i && difference.value[p] !== 0) {
				throw new MatrixFileError(
					`${path}: entries (${i + 1}, ${j + 1}) and (${j + 1}, ${i + 1}) differ (expected a symmetric matrix)`
				);
			}
		}
	}
	const lower = Int32Array.from(rows.keys()).filter((e) => rows[e] >= columns[e]);
	return assembleEntries(
		n,
		lower.map((e) => rows[e]),
		lower.map((e) => columns[e]),
		Float64Array.from(lower, (e) => values[e])
	);
}

/** Reads a dense array, column by column: `columns` columns of any number of rows. */
export async function readColumns(path: string, columns: number): Promise<Float64Array[]> {
	let rows = -1;
	const values: number[] = [];
	await readNumbers(
		path,
		({ isCoordinate }) => {
			if (isCoordinate) {
				throw new MatrixFileError(`${path}:1: coordinate format (expected a dense array)`);
			}
		},
		(numbers, line) => {
			if (rows < 0) {
				if (numbers.length !== 2 || !isCount(numbers[0]) || numbers[1] !== columns) {
					throw new MatrixFileError(
						`${path}:${line}: sizes ${numbers.join(' ')} (expected rows and ${columns} as columns)`
					);
				}
				rows = numbers[0];
				return;
			}
			values.push(...numbers);
		}
	);
	if (rows < 0) throw new MatrixFileError(`${path}: no sizes (expected a line rows columns)`);
	if (values.length !== rows * columns) {
		throw new MatrixFileError(`${path}: ${values.length} values (expected ${rows * columns})`);
	}
	return Array.from({ length: columns }, (_, k) =>
		Float64Array.from(values.slice(k * rows, (k + 1) * rows))
	);
}

async function writeLines(path: string, lines: Iterable<string>): Promise<void> {
	const stream = createWriteStream(path);
	for (const line of lines) if (!stream.write(`${line}\n`)) await once(stream, 'drain');
	stream.end();
	await once(stream, 'finish');
}

/** Writes the lower triangle of a symmetric matrix, numbers in full precision. */
export async function writeMatrix(path: string, matrix: SymmetricMatrix): Promise<void> {
	const { n, rowStart, column, value } = matrix;
	function* lines() {
		yield '%%MatrixMarket matrix coordinate real symmetric';
		yield `${n} ${n} ${(column.length + n) / 2}`;
		for (let i = 0; i < n; i++) {
			for (let p = rowStart[i]; p < rowStart[i + 1] && column[p] <= i; p++) {
				yield `${i + 1} ${column[p] + 1} ${value[p]}`;
			}
		}
	}
	await writeLines(path, lines());
}

/** Writes columns of equal length as a dense array. */
export async function writeColumns(
	path: string,
	columns: readonly ArrayLike<number>[]
): Promise<void> {
	function* lines() {
		yield '%%MatrixMarket matrix array real general';
		yield `${columns[0].length} ${columns.length}`;
		for (const column of columns) {
			for (let i = 0; i < column.length; i++) yield String(column[i]);
		}
	}
	await writeLines(path, lines());
}
