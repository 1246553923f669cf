import { NM_PER_UM, type Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import {
	blockAt,
	dropAt,
	limitsFor,
	lowestLayerNodes,
	netDropLimit,
	nodePositionUm
} from './readings.ts';
import type { Spot } from './schema.ts';

/** Largest number of spots of one net. */
const MAX_SPOTS = 8;

/**
 * Nodes that no node within `apartNm` exceeds (of equals the lowest index), largest value first.
 * Buckets have the distance as their diagonal, so that such a node is the largest of its bucket.
 */
export function localMaxima(
	nodes: Int32Array,
	xNm: Int32Array,
	yNm: Int32Array,
	value: (node: number) => number,
	apartNm: number
): number[] {
	const side = Math.max(1, apartNm / Math.SQRT2);
	const buckets = new Map<string, number[]>();
	const key = (column: number, row: number) => `${column},${row}`;
	const bucketOf = (node: number): [number, number] => [
		Math.floor(xNm[node] / side),
		Math.floor(yNm[node] / side)
	];
	const values = new Map<number, number>();
	for (const node of nodes) {
		values.set(node, value(node));
		const at = key(...bucketOf(node));
		const bucket = buckets.get(at);
		if (bucket === undefined) buckets.set(at, [node]);
		else bucket.push(node);
	}
	const read = (node: number) => values.get(node) ?? -Infinity;
	const above = (a: number, b: number) => read(a) > read(b) || (read(a) === read(b) && a < b);
	const maxima: number[] = [];
	for (const bucket of buckets.values()) {
		const top = bucket.reduce((best, node) => (above(node, best) ? node : best));
		const [column, row] = bucketOf(top);
		let exceeded = false;
		for (let dc = -2; dc <= 2 && !exceeded; dc++) {
			for (let dr = -2; dr <= 2 && !exceeded; dr++) {
				exceeded = (buckets.get(key(column + dc, row + dr)) ?? []).some(
					(node) =>
						above(node, top) && Math.hypot(xNm[node] - xNm[top], yNm[node] - yNm[top]) < apartNm
				);
			}
		}
		if (!exceeded) maxima.push(top);
	}
	return maxima.sort((a, b) => (above(a, b) ? -1 : 1));
}

/**
 * The worst spots of a net: local maxima of drop on its lowest layer.
 * @param apartUm least distance between two spots
 */
export function worstSpots(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint,
	net: number,
	apartUm: number
): Spot[] {
	const { id } = network.nets[net];
	const planNet = floorplan.nets.find((candidate) => candidate.id === id);
	const drop = (node: number) => dropAt(network, point, node).dropV;
	return localMaxima(
		lowestLayerNodes(network, net),
		network.nodes.xNm,
		network.nodes.yNm,
		drop,
		apartUm * NM_PER_UM
	)
		.filter((node) => drop(node) > 0)
		.slice(0, MAX_SPOTS)
		.map((node) => {
			const [xUm, yUm] = nodePositionUm(network, node);
			const block = blockAt(floorplan, id, xUm, yUm);
			const reading = dropAt(network, point, node);
			const limitV =
				(block === null
					? planNet && netDropLimit(floorplan, planNet)
					: limitsFor(floorplan, id, block).dropV) ?? null;
			return {
				net: id,
				xUm,
				yUm,
				layer: floorplan.layers[network.nodes.layer[node]].id,
				block,
				...reading,
				limitV,
				marginV: limitV === null ? null : limitV - reading.dropV
			};
		});
}
