import { NM_PER_UM, type Floorplan, type LimitSet } from '#lib/floorplan/index.ts';
import { containsPoint } from '#lib/geometry/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';

/** A drop and its two parts, V: `dropV` = `netDropV` + `groundRiseV`. */
export interface DropReading {
	readonly dropV: number;
	/** Nominal volts minus the net's own voltage. */
	readonly netDropV: number;
	/** Rise of the local ground above 0 V. */
	readonly groundRiseV: number;
}

/** The drop that a load at a node would see, with `ground` as its return (-1: ideal). */
export function dropAgainst(
	network: Network,
	point: OperatingPoint,
	node: number,
	ground: number
): DropReading {
	const netDropV = point.nominalV[network.nodes.net[node]] - point.voltage[node];
	const groundRiseV = ground < 0 ? 0 : point.voltage[ground];
	return { dropV: netDropV + groundRiseV, netDropV, groundRiseV };
}

/** The drop at a node against the local ground. */
export function dropAt(network: Network, point: OperatingPoint, node: number): DropReading {
	return dropAgainst(network, point, node, network.nodes.localGround[node]);
}

/** Position of a node, um; nodes lie on the nanometre grid. */
export function nodePositionUm(network: Network, node: number): [number, number] {
	return [network.nodes.xNm[node] / NM_PER_UM, network.nodes.yNm[node] / NM_PER_UM];
}

/** Rounds a position to 0.001 um. */
export function roundedUm(xUm: number, yUm: number): [number, number] {
	return [Math.round(xUm * NM_PER_UM) / NM_PER_UM, Math.round(yUm * NM_PER_UM) / NM_PER_UM];
}

/** Id of the first block of a net that covers a place, or null. */
export function blockAt(
	floorplan: Floorplan,
	net: string,
	xUm: number,
	yUm: number
): string | null {
	const covering = floorplan.blocks.find(
		(block) => block.net === net && containsPoint(block.outline, xUm, yUm)
	);
	return covering?.id ?? null;
}

/** The limits that hold for a net, or for a block of it: block over net over plan. */
export function limitsFor(floorplan: Floorplan, net: string, block?: string): LimitSet {
	const { overrides, ...plan } = floorplan.limits;
	return {
		...plan,
		...overrides?.nets?.[net],
		...(block === undefined ? {} : overrides?.blocks?.[block])
	};
}

/**
 * The drop limit of a net, or undefined. The plan's own limit is about what loads see: on an input
 * net without blocks only a limit stated for that net holds.
 */
export function netDropLimit(
	floorplan: Floorplan,
	net: Floorplan['nets'][number]
): number | undefined {
	const own = floorplan.limits.overrides?.nets?.[net.id]?.dropV;
	if (own !== undefined || net.kind === 'regulated') return own ?? floorplan.limits.dropV;
	const loaded = floorplan.blocks.some((block) => block.net === net.id);
	return net.kind === 'input' && loaded ? floorplan.limits.dropV : undefined;
}

/** Nodes of a net on its lowest layer. */
export function lowestLayerNodes(network: Network, net: number): Int32Array {
	const { firstNode, nodeCount, lowestLayer } = network.nets[net];
	const nodes: number[] = [];
	for (let node = firstNode; node < firstNode + nodeCount; node++) {
		if (network.nodes.layer[node] === lowestLayer) nodes.push(node);
	}
	return Int32Array.from(nodes);
}
