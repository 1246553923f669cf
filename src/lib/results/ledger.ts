import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import { dropAgainst, limitsFor, nodePositionUm } from './readings.ts';
import type { BlockResult, FeedResult, RegulatorResult } from './schema.ts';

/** The regulators' part of the ledger, in the order of the file. */
export function regulatorResults(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint
): RegulatorResult[] {
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	const { outputNode, inputNode, groundNode } = network.regulators;
	return floorplan.regulators.map((unit, index): RegulatorResult => {
		const cell = cells.get(unit.cell);
		const amps = point.regulatorAmps[index];
		const outV = outputNode[index] < 0 ? null : point.voltage[outputNode[index]];
		const inV = inputNode[index] < 0 ? null : point.voltage[inputNode[index]];
		return {
			id: unit.id,
			amps,
			loadFraction: cell === undefined ? 0 : amps / cell.maxA,
			state: point.regulatorStates[index],
			setV: point.regulatorSetV[index],
			outV,
			inV,
			gndV: groundNode[index] < 0 ? 0 : point.voltage[groundNode[index]],
			headroomV:
				inV === null || outV === null || cell === undefined ? null : inV - outV - cell.onOhm * amps,
			lossW: point.regulatorLossW[index]
		};
	});
}

/** The blocks' part of the ledger; a block that never draws, on a net without nodes, is left out. */
export function blockResults(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint
): BlockResult[] {
	const { loads, nodes } = network;
	const collapsed = new Set(point.collapsedBlocks);
	const results: BlockResult[] = [];
	let load = 0;
	floorplan.blocks.forEach((block, index) => {
		let amps = 0;
		let powerW = 0;
		let meanV = 0;
		let minV = Infinity;
		let worst = -1;
		for (; load < loads.count && loads.block[load] === index; load++) {
			const node = loads.node[load];
			const ground = loads.groundNode[load];
			const seen = point.voltage[node] - (ground < 0 ? 0 : point.voltage[ground]);
			amps += point.loadAmps[load];
			powerW += point.loadAmps[load] * seen;
			meanV += loads.share[load] * seen;
			if (seen < minV) {
				minV = seen;
				worst = load;
			}
		}
		// A block that never draws, on a net that is not connected, reads nothing.
		if (worst < 0) return;
		const node = loads.node[worst];
		const reading = dropAgainst(network, point, node, loads.groundNode[worst]);
		const limitV = limitsFor(floorplan, block.net, block.id).dropV ?? null;
		results.push({
			id: block.id,
			net: network.nets[nodes.net[node]].id,
			amps,
			meanV,
			minV,
			worstDropV: reading.dropV,
			netDropV: reading.netDropV,
			groundRiseV: reading.groundRiseV,
			atUm: nodePositionUm(network, node),
			powerW,
			limitV,
			marginV: limitV === null ? null : limitV - reading.dropV,
			collapsed: collapsed.has(index)
		});
	});
	return results;
}

/** The feeds' part of the ledger, in the order of the file. */
export function feedResults(floorplan: Floorplan, point: OperatingPoint): FeedResult[] {
	return floorplan.feeds.map((feed, index) => {
		const amps = point.feedAmps[index];
		return {
			id: feed.id,
			net: feed.net,
			amps,
			loadFraction: feed.maxA === undefined ? null : Math.abs(amps) / feed.maxA
		};
	});
}
