import { NM_PER_UM, toNm } from '#lib/floorplan/index.ts';
import type { Block } from '#lib/floorplan/index.ts';
import { boundsOf } from '#lib/geometry/index.ts';
import type { Components } from './components.ts';
import { openGroundTest } from './ground-returns.ts';
import { IntBuffer } from './int-buffer.ts';
import { NearestPoint } from './nearest-point.ts';
import type { ModelProblem, ModelWarning, NetworkLoads } from './network.ts';
import type { Numbering } from './nodes.ts';
import { indexOfId, type PlanIndex } from './plan-index.ts';
import type { Points } from './points.ts';
import type { Runs } from './runs.ts';
import { BlockSpreader, type SpreadTarget } from './spread.ts';
import { outermostLayer } from './taps.ts';

export interface LoadsResult {
	/** Loads without their ground nodes, which the numbered network gives. */
	readonly loads: Omit<NetworkLoads, 'groundNode'>;
	readonly warnings: readonly ModelWarning[];
	readonly problems: readonly ModelProblem[];
}

type PlaceUm = readonly [number, number];

/** Largest current that a block draws in any mode, A; 0 for a block that carries no load. */
function largestAmps(block: Block): number {
	return Object.values(block.amps).reduce((max, amps) => Math.max(max, Math.abs(amps)), 0);
}

/** Run that a point belongs to. */
function runOfPoint({ start }: Points, point: number): number {
	let low = 0;
	let high = start.length - 2;
	while (low < high) {
		const middle = (low + high + 1) >>> 1;
		if (start[middle] <= point) low = middle;
		else high = middle - 1;
	}
	return low;
}

/** The runs that may carry the block, or null where its net has none. */
function targetOf(
	plan: PlanIndex,
	runs: Runs,
	points: Points,
	net: number,
	layer: number,
	isIncluded: Uint8Array
): SpreadTarget | null {
	if (layer < 0) return null;
	const group = net * plan.layerCount + layer;
	const from = runs.groupStart[group];
	const to = runs.groupStart[group + 1];
	let maxPitchNm = 0;
	for (let run = from; run < to; run++) {
		maxPitchNm = Math.max(maxPitchNm, plan.patterns[runs.strap[run]].pitchNm);
	}
	return {
		runs,
		points,
		patterns: plan.patterns,
		from,
		to,
		isHorizontal: plan.isHorizontal[layer],
		maxPitchNm,
		isIncluded
	};
}

/**
 * Attaches every block's current to nodes of its net's lowest layer (model section 3.6). A block
 * that draws current is spread over all straps there, and a share on a part without a source is a
 * problem; a block that never draws is spread over what is connected, and has no entries where its
 * net is not connected at all.
 */
export function attachLoads(
	plan: PlanIndex,
	runs: Runs,
	points: Points,
	{ isSourced }: Components,
	{ nets, shift }: Numbering
): LoadsResult {
	const { floorplan, netOf, isHorizontal } = plan;
	const warnings: ModelWarning[] = [];
	const problems: ModelProblem[] = [];
	const everyRun = new Uint8Array(runs.count).fill(1);
	const spreader = new BlockSpreader(points.count);
	const isOpenGround = openGroundTest(plan, runs, points, isSourced);
	const blockOf = new IntBuffer();
	const nodeOf = new IntBuffer();
	const shareParts: Float64Array[] = [];

	/** Records one block's entries; says where it loads parts that no source or return reaches. */
	function record(b: number, carrying: Int32Array, shares: Float64Array) {
		let run = runOfPoint(points, carrying[0]);
		let islandShare = 0;
		let openShare = 0;
		let islandUm: PlaceUm | null = null;
		let openUm: PlaceUm | null = null;
		for (let i = 0; i < carrying.length; i++) {
			const point = carrying[i];
			while (points.start[run + 1] <= point) run++;
			blockOf.push(b);
			nodeOf.push(point + shift[run]);
			if (isSourced[run] === 1 && isOpenGround === null) continue;
			const along = points.alongNm[point];
			const across = runs.coordinateNm[run];
			const [x, y] = isHorizontal[runs.layer[run]] ? [along, across] : [across, along];
			if (isSourced[run] === 0) {
				islandShare += shares[i];
				islandUm ??= [x / NM_PER_UM, y / NM_PER_UM];
			}
			if (isOpenGround !== null && isOpenGround(x, y)) {
				openShare += shares[i];
				openUm ??= [x / NM_PER_UM, y / NM_PER_UM];
			}
		}
		shareParts.push(shares);
		return { islandShare, islandUm, openShare, openUm };
	}

	for (const [b, block] of floorplan.blocks.entries()) {
		const net = indexOfId(netOf, block.net);
		const wantedA = largestAmps(block);
		const isLoaded = wantedA > 0;
		const path = `blocks (${block.id})`;
		const bounds = boundsOf(block.outline);
		const centreUm: PlaceUm = [(bounds.minX + bounds.maxX) / 2, (bounds.minY + bounds.maxY) / 2];
		const layer = isLoaded ? outermostLayer(plan, runs, net, 1) : nets[net].lowestLayer;
		const target = targetOf(plan, runs, points, net, layer, isLoaded ? everyRun : isSourced);
		if (target === null) {
			if (!isLoaded) continue;
			problems.push({
				path,
				message:
					`net ${block.net} has no strap on the die: wanted up to ${wantedA} A, available 0 A ` +
					`(expected a strap pattern of that net)`,
				subject: block.id,
				atUm: centreUm
			});
			continue;
		}
		let { points: carrying, shares } = spreader.spread(block, target);
		if (carrying.length === 0) {
			const group = net * plan.layerCount + layer;
			const nearest = new NearestPoint(runs, points, group, target.isIncluded);
			const [x, y] = centreUm.map(toNm);
			carrying = Int32Array.of(target.isHorizontal ? nearest.find(x, y) : nearest.find(y, x));
			shares = Float64Array.of(1);
			warnings.push({
				code: 'block-off-straps',
				message:
					`${path}: it covers no cell of a node of net ${block.net} on ` +
					`${floorplan.layers[layer].id}, so all its current goes to the nearest node`,
				subject: block.id,
				atUm: centreUm
			});
		}
		const { islandShare, islandUm, openShare, openUm } = record(b, carrying, shares);
		if (!isLoaded) continue;
		if (islandUm !== null) {
			const source = nets[net].kind === 'regulated' ? 'enabled regulator' : 'feed';
			problems.push({
				path,
				message:
					`loads a part of net ${block.net} that has no ${source}, at ${islandUm.join(', ')} um: ` +
					`wanted there up to ${wantedA * islandShare} A, available 0 A ` +
					`(expected straps or vias that join this part to one)`,
				subject: block.id,
				atUm: islandUm
			});
		}
		if (openUm !== null) {
			const ground = floorplan.nets[plan.groundNet].id;
			problems.push({
				path,
				message:
					`its current returns into a part of net ${ground} that has no feed, near ` +
					`${openUm.join(', ')} um: wanted there up to ${wantedA * openShare} A, available 0 A ` +
					`(expected straps or vias that join this part to a feed)`,
				subject: block.id,
				atUm: openUm
			});
		}
	}

	const share = new Float64Array(blockOf.length);
	let filled = 0;
	for (const part of shareParts) {
		share.set(part, filled);
		filled += part.length;
	}
	return {
		loads: { count: filled, block: blockOf.toArray(), node: nodeOf.toArray(), share },
		warnings,
		problems
	};
}
