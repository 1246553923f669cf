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

/** Reads a symmetric matrix, of which either one triangle or both may be stored. */
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
				if (numbers.length !== 3 || n !== m) {
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
			const [i, j, value] = numbers;
			if (numbers.length !== 3 || i < 1 || j < 1 || i > size.n || j > size.n) {
				throw new MatrixFileError(
					`${path}:${line}: "${numbers.join(' ')}" (expected row, column of 1 to ${size.n}, value)`
				);
			}
			// A general file holds both triangles: the lower one is enough.
			if (!header.isSymmetric && i < j) return;
			rows[stored] = i - 1;
			columns[stored] = j - 1;
			values[stored++] = value;
		}
	);
	if (!size) throw new MatrixFileError(`${path}: no sizes`);
	if (header.isSymmetric && stored !== size.entries) {
		throw new MatrixFileError(`${path}: ${stored} entries (expected ${size.entries})`);
	}
	return assembleEntries(
		size.n,
		rows.subarray(0, stored),
		columns.subarray(0, stored),
		values.subarray(0, stored)
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
				rows = numbers[0];
				if (numbers[1] !== columns) {
					throw new MatrixFileError(`${path}:${line}: ${numbers[1]} columns (expected ${columns})`);
				}
				return;
			}
			values.push(...numbers);
		}
	);
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
