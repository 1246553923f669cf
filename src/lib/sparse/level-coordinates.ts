import type { SymmetricMatrix } from './matrix.ts';

/**
 * Coordinates for a graph that has none: x is the distance (in edges) from one end of a long
 * shortest path, found by repeated breadth-first searches (Gibbs, Poole, Stockmeyer 1976); y is the
 * distance from a node far from both ends. They are rough, but a median cut of them separates well.
 */
export function levelCoordinates(matrix: SymmetricMatrix): { x: Float64Array; y: Float64Array } {
	const { n } = matrix;
	const x = new Float64Array(n);
	const y = new Float64Array(n);
	const level = new Int32Array(n).fill(-1);
	const queue = new Int32Array(n);
	const isDone = new Uint8Array(n);
	let offset = 0;
	for (let start = 0; start < n; start++) {
		if (isDone[start]) continue;
		let size = search(matrix, start, level, queue);
		const firstEnd = queue[size - 1];
		clearLevels(level, queue, size);
		size = search(matrix, firstEnd, level, queue);
		const lastEnd = queue[size - 1];
		// Components lie side by side, so that a cut never mixes what no edge joins.
		for (let k = 0; k < size; k++) x[queue[k]] = offset + level[queue[k]];
		const length = level[lastEnd];
		const fromFirst = new Int32Array(size);
		const members = queue.slice(0, size);
		for (let k = 0; k < size; k++) fromFirst[k] = level[members[k]];
		clearLevels(level, queue, size);
		search(matrix, lastEnd, level, queue);
		let side = members[0];
		let farthest = -1;
		for (let k = 0; k < size; k++) {
			const nearest = Math.min(fromFirst[k], level[members[k]]);
			if (nearest > farthest) {
				farthest = nearest;
				side = members[k];
			}
		}
		clearLevels(level, queue, size);
		search(matrix, side, level, queue);
		for (let k = 0; k < size; k++) {
			y[queue[k]] = level[queue[k]];
			isDone[queue[k]] = 1;
		}
		clearLevels(level, queue, size);
		offset += length + 2;
	}
	return { x, y };
}

/** Breadth-first search; fills `level` and `queue`, returns how many nodes were reached. */
function search(
	{ rowStart, column }: SymmetricMatrix,
	start: number,
	level: Int32Array,
	queue: Int32Array
): number {
	level[start] = 0;
	queue[0] = start;
	let size = 1;
	for (let head = 0; head < size; head++) {
		const i = queue[head];
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) {
			const j = column[p];
			if (level[j] < 0) {
				level[j] = level[i] + 1;
				queue[size++] = j;
			}
		}
	}
	return size;
}

function clearLevels(level: Int32Array, queue: Int32Array, size: number): void {
	for (let k = 0; k < size; k++) level[queue[k]] = -1;
}
