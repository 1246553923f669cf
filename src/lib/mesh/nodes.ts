import type { Components } from './components.ts';
import { NearestPoint } from './nearest-point.ts';
import type { NetworkNet, NetworkNodes } from './network.ts';
import type { PlanIndex } from './plan-index.ts';
import type { Points } from './points.ts';
import type { Runs } from './runs.ts';

/** The numbering of the nodes: points of sourced runs, in the order of the runs. */
export interface Numbering {
	readonly nets: readonly NetworkNet[];
	readonly nodeCount: number;
	/** What to add to a point of a run to get its node. Length `runs.count`. */
	readonly shift: Int32Array;
	readonly leftOutNodes: number;
}

/** Numbers the points of every run that a source reaches; the others are left out and counted. */
export function numberNodes(
	plan: PlanIndex,
	runs: Runs,
	points: Points,
	{ isSourced }: Components
): Numbering {
	const shift = new Int32Array(runs.count);
	let leftOut = 0;
	for (let run = 0; run < runs.count; run++) {
		shift[run] = -leftOut;
		if (isSourced[run] === 0) leftOut += points.start[run + 1] - points.start[run];
	}
	let run = 0;
	let node = 0;
	const nets = plan.floorplan.nets.map((net, n): NetworkNet => {
		const firstNode = node;
		let lowestLayer = -1;
		let highestLayer = -1;
		for (; run < runs.count && runs.net[run] === n; run++) {
			if (isSourced[run] === 0) continue;
			if (lowestLayer < 0) lowestLayer = runs.layer[run];
			highestLayer = runs.layer[run];
			node += points.start[run + 1] - points.start[run];
		}
		return {
			id: net.id,
			kind: net.kind,
			volts: net.volts,
			firstNode,
			nodeCount: node - firstNode,
			lowestLayer,
			highestLayer
		};
	});
	return { nets, nodeCount: node, shift, leftOutNodes: leftOut };
}

/** Fills the arrays of the nodes, the nearest ground node of each included. */
export function buildNodes(
	plan: PlanIndex,
	runs: Runs,
	points: Points,
	{ isSourced }: Components,
	{ nets, nodeCount, shift }: Numbering
): NetworkNodes {
	const xNm = new Int32Array(nodeCount);
	const yNm = new Int32Array(nodeCount);
	const layer = new Uint8Array(nodeCount);
	const net = new Uint16Array(nodeCount);
	for (let run = 0; run < runs.count; run++) {
		if (isSourced[run] === 0) continue;
		const first = points.start[run] + shift[run];
		const end = points.start[run + 1] + shift[run];
		const [along, across] = plan.isHorizontal[runs.layer[run]] ? [xNm, yNm] : [yNm, xNm];
		along.set(points.alongNm.subarray(points.start[run], points.start[run + 1]), first);
		across.fill(runs.coordinateNm[run], first, end);
		layer.fill(runs.layer[run], first, end);
		net.fill(runs.net[run], first, end);
	}

	const localGround = new Int32Array(nodeCount).fill(-1);
	const ground = plan.groundNet < 0 ? null : nets[plan.groundNet];
	if (ground !== null && ground.nodeCount > 0) {
		const group = plan.groundNet * plan.layerCount + ground.lowestLayer;
		const nearest = new NearestPoint(runs, points, group, isSourced);
		const [along, across] = plan.isHorizontal[ground.lowestLayer] ? [xNm, yNm] : [yNm, xNm];
		const groundEnd = ground.firstNode + ground.nodeCount;
		for (let node = 0; node < nodeCount; node++) {
			if (node === ground.firstNode) node = groundEnd;
			if (node >= nodeCount) break;
			const point = nearest.find(along[node], across[node]);
			localGround[node] = point + shift[nearest.foundRun];
		}
	}
	return { count: nodeCount, xNm, yNm, layer, net, localGround };
}
