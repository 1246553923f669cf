import type { EliminationOrder } from './elimination-order.ts';
import { bindKernels, KERNEL_SIZES, planSpace } from './kernels.ts';
import type { SymmetricMatrix } from './matrix.ts';
import { giveBackMemory, takeMemory } from './memory-pool.ts';

/**
 * Geometric nested dissection (A. George, SIAM J. Numer. Anal. 10 (1973) 345): each part is cut near
 * the median of the longer side of its bounding box; the nodes of the low side that have a
 * neighbour on the high side separate the two and are ordered last. Needs a coordinate pair for
 * each node (any unit, finite; else a RangeError), not a lattice. Every separator and every part
 * that is cut no further is one piece of the order: what lies on both sides of it joins all its
 * nodes, so that it is dense in the factor anyway. The work is done in assembly/dissection.ts.
 */
export function orderNestedDissection(
	{ n, rowStart, column }: Pick<SymmetricMatrix, 'n' | 'rowStart' | 'column'>,
	x: ArrayLike<number>,
	y: ArrayLike<number>
): EliminationOrder {
	if (x.length !== n || y.length !== n) {
		throw new RangeError(`${x.length} and ${y.length} coordinates for ${n} nodes`);
	}
	for (let i = 0; i < n; i++) {
		if (!Number.isFinite(x[i]) || !Number.isFinite(y[i])) {
			throw new RangeError(`node ${i} is at ${x[i]}, ${y[i]}: expected finite coordinates`);
		}
	}
	if (n === 0) {
		return { perm: new Int32Array(0), start: new Int32Array(1), parent: new Int32Array(0) };
	}
	const space = planSpace();
	const rowStartAt = space.take(4 * (n + 1));
	const columnAt = space.take(4 * column.length);
	const xAt = space.take(8 * n);
	const yAt = space.take(8 * n);
	const orderAt = space.take(4 * n);
	const startAt = space.take(4 * (n + 1));
	const parentAt = space.take(4 * n);
	const workAt = space.take(KERNEL_SIZES.dissectionBytesPerNode * n + KERNEL_SIZES.dissectionBytes);
	const memory = takeMemory(space.bytes, false);
	const { buffer } = memory;
	new Int32Array(buffer, rowStartAt, n + 1).set(rowStart);
	new Int32Array(buffer, columnAt, column.length).set(column);
	new Float64Array(buffer, xAt, n).set(x);
	new Float64Array(buffer, yAt, n).set(y);
	new Int32Array(buffer, parentAt, n).fill(-1);
	const kernels = bindKernels(memory, false);
	const pieces = kernels.orderByPlace(
		n,
		rowStartAt,
		columnAt,
		xAt,
		yAt,
		orderAt,
		startAt,
		parentAt,
		workAt
	);
	const order = {
		perm: new Int32Array(buffer, orderAt, n).slice(),
		start: new Int32Array(buffer, startAt, pieces + 1).slice(),
		parent: new Int32Array(buffer, parentAt, pieces).slice()
	};
	giveBackMemory(memory, false);
	return order;
}
