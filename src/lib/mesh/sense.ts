import type { Floorplan } from '#lib/floorplan/index.ts';
import { NM_PER_UM } from '#lib/floorplan/index.ts';
import { RESISTOR_SEGMENT, type ModelWarning, type Network } from './network.ts';

/** Where the shared slow loop of one net looks. */
export interface SenseProbe {
	/** Index into `network.nets`. */
	readonly net: number;
	/** Nodes that the loop measures, one per point used; a node may occur twice. */
	readonly node: Int32Array;
	/** Weight of each node; they sum to 1. */
	readonly weight: Float64Array;
	/** Largest correction either way, V. */
	readonly rangeV: number;
	readonly warnings: readonly ModelWarning[];
}

interface Foot {
	readonly node: number;
	readonly distanceNm: number;
	readonly pitchNm: number;
}

/** The piece of strap on the net's lowest layer that is nearest to a point, and its nearer end. */
function nearestPiece(
	floorplan: Floorplan,
	network: Network,
	net: number,
	xNm: number,
	yNm: number
): Foot | null {
	const { nodes, resistors } = network;
	const lowest = network.nets[net].lowestLayer;
	let best: Foot | null = null;
	for (let r = 0; r < resistors.count; r++) {
		const from = resistors.from[r];
		if (resistors.kind[r] !== RESISTOR_SEGMENT || resistors.layer[r] !== lowest) continue;
		if (nodes.net[from] !== net) continue;
		const to = resistors.to[r];
		const minX = Math.min(nodes.xNm[from], nodes.xNm[to]);
		const maxX = Math.max(nodes.xNm[from], nodes.xNm[to]);
		const minY = Math.min(nodes.yNm[from], nodes.yNm[to]);
		const maxY = Math.max(nodes.yNm[from], nodes.yNm[to]);
		const footX = Math.min(Math.max(xNm, minX), maxX);
		const footY = Math.min(Math.max(yNm, minY), maxY);
		const distanceNm = Math.hypot(footX - xNm, footY - yNm);
		if (best !== null && distanceNm >= best.distanceNm) continue;
		const toFrom = Math.hypot(nodes.xNm[from] - footX, nodes.yNm[from] - footY);
		const toTo = Math.hypot(nodes.xNm[to] - footX, nodes.yNm[to] - footY);
		best = {
			node: toTo < toFrom ? to : from,
			distanceNm,
			pitchNm: Math.round(floorplan.straps[resistors.source[r]].pitchUm * NM_PER_UM)
		};
	}
	return best;
}

/**
 * The nodes at which each net's sense loop measures: for every sense point the nearer end of the
 * nearest strap piece of the net's lowest layer. A point farther from the strap than its pitch does
 * not fall on the net: it is left out with a warning, unless no point falls on it, when all are used.
 */
export function senseProbes(floorplan: Floorplan, network: Network): SenseProbe[] {
	const probes: SenseProbe[] = [];
	network.nets.forEach((networkNet, net) => {
		const loop = floorplan.nets.find((candidate) => candidate.id === networkNet.id)?.senseLoop;
		if (loop === undefined || networkNet.kind !== 'regulated') return;
		const feet = loop.points.flatMap((point) => {
			const xNm = Math.round(point.xUm * NM_PER_UM);
			const yNm = Math.round(point.yUm * NM_PER_UM);
			const foot = nearestPiece(floorplan, network, net, xNm, yNm);
			return foot === null ? [] : [{ ...foot, point, onNet: foot.distanceNm <= foot.pitchNm }];
		});
		if (feet.length === 0) return;
		const warnings = feet
			.filter((foot) => !foot.onNet)
			.map(({ point, distanceNm }): ModelWarning => ({
				code: 'sense-off-net',
				message:
					`nets (${networkNet.id}): the sense point at ${point.xUm}, ${point.yUm} um is ` +
					`${distanceNm / NM_PER_UM} um from the net's nearest strap; move it onto the net`,
				subject: networkNet.id,
				atUm: [point.xUm, point.yUm]
			}));
		const onNet = feet.filter((foot) => foot.onNet);
		const used = onNet.length > 0 ? onNet : feet;
		const total = used.reduce((sum, foot) => sum + foot.point.weight, 0);
		probes.push({
			net,
			node: Int32Array.from(used, (foot) => foot.node),
			weight: Float64Array.from(used, (foot) => foot.point.weight / total),
			rangeV: loop.rangeV,
			warnings
		});
	});
	return probes;
}
