import { NM_PER_UM, type Floorplan } from '#lib/floorplan/index.ts';
import { boundsOf, clipLineToPolygon, type Point } from '#lib/geometry/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import type { DropMap } from './drop-map.ts';
import { dropAt } from './readings.ts';

/** Largest number of cells along the longer side of the die. */
const MAX_CELLS = 400;
/** Cells per distance between neighbouring nodes: finer ones would only repeat a value. */
const CELLS_PER_SPACING = 2;

/** The area for which a node stands: half way to its neighbours along the strap, half a pitch across. */
interface NodeAreas {
	readonly node: Int32Array;
	/** Four per node: minX, minY, maxX, maxY, nm. */
	readonly bounds: Float64Array;
	/** Smallest distance between neighbours, along or across, nm. */
	readonly spacingNm: number;
}

function nodeAreas(floorplan: Floorplan, network: Network, net: number): NodeAreas {
	const { nodes, resistors } = network;
	const { firstNode, nodeCount, lowestLayer } = network.nets[net];
	const horizontal = floorplan.layers[lowestLayer].direction === 'horizontal';
	const along = horizontal ? nodes.xNm : nodes.yNm;
	const across = horizontal ? nodes.yNm : nodes.xNm;
	// Reach before and after each node along its strap, and its strap pattern, from the pieces.
	const before = new Float64Array(nodeCount);
	const after = new Float64Array(nodeCount);
	const pattern = new Int32Array(nodeCount).fill(-1);
	let spacingNm = Infinity;
	for (let r = 0; r < resistors.count; r++) {
		// Only vias have cuts; their layer is the lower of the two, so they must be told apart.
		if (resistors.cuts[r] > 0 || resistors.layer[r] !== lowestLayer) continue;
		if (nodes.net[resistors.from[r]] !== net) continue;
		const forward = along[resistors.from[r]] <= along[resistors.to[r]];
		const low = (forward ? resistors.from[r] : resistors.to[r]) - firstNode;
		const high = (forward ? resistors.to[r] : resistors.from[r]) - firstNode;
		const length = along[high + firstNode] - along[low + firstNode];
		after[low] = length / 2;
		before[high] = length / 2;
		pattern[low] = resistors.source[r];
		pattern[high] = resistors.source[r];
		spacingNm = Math.min(spacingNm, length);
	}
	const used: number[] = [];
	for (let i = 0; i < nodeCount; i++) if (pattern[i] >= 0) used.push(i);
	const bounds = new Float64Array(4 * used.length);
	used.forEach((i, index) => {
		const halfPitch = (floorplan.straps[pattern[i]].pitchUm * NM_PER_UM) / 2;
		spacingNm = Math.min(spacingNm, 2 * halfPitch);
		const node = i + firstNode;
		const alongRange = [along[node] - before[i], along[node] + after[i]];
		const acrossRange = [across[node] - halfPitch, across[node] + halfPitch];
		const [x, y] = horizontal ? [alongRange, acrossRange] : [acrossRange, alongRange];
		bounds.set([x[0], y[0], x[1], y[1]], 4 * index);
	});
	return { node: Int32Array.from(used, (i) => i + firstNode), bounds, spacingNm };
}

/**
 * Paints the map of one net. Each cell takes the value at its centre of the node of the net's lowest
 * layer in whose own area (half way to its neighbours along the strap, to the strap's end, half a
 * pitch to each side) the centre lies; where areas of two patterns overlap, of the nearer node.
 * Cells outside the die and cells that no such area reaches are NaN.
 *
 * Cells are square, at most 400 along the longer side of the die, and not finer than half the
 * smallest distance between neighbouring nodes or straps. On the ground net `dropV` is its rise.
 *
 * @returns null for a net that has no nodes
 */
export function buildDropMap(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint,
	netId: string
): DropMap | null {
	const net = network.nets.findIndex((candidate) => candidate.id === netId);
	if (net < 0) throw new RangeError(`there is no net "${netId}" in the plan`);
	if (network.nets[net].nodeCount === 0) return null;
	const areas = nodeAreas(floorplan, network, net);
	const outline: Point[] = floorplan.die.outline.map(([x, y]) => [x * NM_PER_UM, y * NM_PER_UM]);
	const { minX, minY, maxX, maxY } = boundsOf(outline);
	const longer = Math.max(maxX - minX, maxY - minY);
	const cellNm = Math.max(
		1,
		Math.ceil(longer / MAX_CELLS),
		Math.min(longer, Math.floor(areas.spacingNm / CELLS_PER_SPACING))
	);
	const columns = Math.max(1, Math.ceil((maxX - minX) / cellNm));
	const rows = Math.max(1, Math.ceil((maxY - minY) / cellNm));
	const originXNm = Math.round(minX);
	const originYNm = Math.round(minY);

	// Nearest node per cell, -1 where no area reaches.
	const owner = new Int32Array(columns * rows).fill(-1);
	const distance = new Float64Array(columns * rows).fill(Infinity);
	for (let index = 0; index < areas.node.length; index++) {
		const node = areas.node[index];
		const x = network.nodes.xNm[node];
		const y = network.nodes.yNm[node];
		const [left, bottom, right, top] = areas.bounds.subarray(4 * index, 4 * index + 4);
		const firstColumn = Math.max(0, Math.ceil((left - originXNm) / cellNm - 0.5));
		const lastColumn = Math.min(columns - 1, Math.floor((right - originXNm) / cellNm - 0.5));
		const firstRow = Math.max(0, Math.ceil((bottom - originYNm) / cellNm - 0.5));
		const lastRow = Math.min(rows - 1, Math.floor((top - originYNm) / cellNm - 0.5));
		for (let row = firstRow; row <= lastRow; row++) {
			const dy = originYNm + (row + 0.5) * cellNm - y;
			for (let column = firstColumn; column <= lastColumn; column++) {
				const dx = originXNm + (column + 0.5) * cellNm - x;
				const cell = row * columns + column;
				const squared = dx * dx + dy * dy;
				if (squared >= distance[cell]) continue;
				distance[cell] = squared;
				owner[cell] = node;
			}
		}
	}

	const dropV = new Float32Array(columns * rows).fill(NaN);
	const netDropV = new Float32Array(columns * rows).fill(NaN);
	const groundRiseV = new Float32Array(columns * rows).fill(NaN);
	const isGround = network.nets[net].kind === 'ground';
	for (let row = 0; row < rows; row++) {
		const y = originYNm + (row + 0.5) * cellNm;
		for (const [start, end] of clipLineToPolygon(outline, 'horizontal', y)) {
			const first = Math.max(0, Math.ceil((start - originXNm) / cellNm - 0.5));
			const last = Math.min(columns - 1, Math.floor((end - originXNm) / cellNm - 0.5));
			for (let column = first; column <= last; column++) {
				const cell = row * columns + column;
				const node = owner[cell];
				if (node < 0) continue;
				if (isGround) {
					dropV[cell] = point.voltage[node];
					netDropV[cell] = 0;
					groundRiseV[cell] = point.voltage[node];
					continue;
				}
				const reading = dropAt(network, point, node);
				dropV[cell] = reading.dropV;
				netDropV[cell] = reading.netDropV;
				groundRiseV[cell] = reading.groundRiseV;
			}
		}
	}
	return { columns, rows, originXNm, originYNm, cellNm, dropV, netDropV, groundRiseV };
}
