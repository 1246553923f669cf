import { MAX_NODES } from './constants.ts';
import { IntBuffer } from './int-buffer.ts';
import type { ModelProblem } from './network.ts';
import { indexOfId, type PlanIndex } from './plan-index.ts';
import type { Runs } from './runs.ts';
import { lowerBound } from './search.ts';

/** The crossings of one net under one via rule: a range of the pair lists. */
export interface CrossingBatch {
	/** Index into `floorplan.vias`. */
	readonly via: number;
	readonly net: number;
	readonly lowerLayer: number;
	readonly first: number;
	readonly count: number;
}

/**
 * Where runs of one net cross and a via joins them. Within a batch the pairs are ordered by
 * horizontal run, then by vertical run: along every run its crossings come in ascending position.
 */
export interface Crossings {
	readonly count: number;
	readonly batches: readonly CrossingBatch[];
	/** Run along x and run along y of each pair. Length `count`. */
	readonly horizontalRun: Int32Array;
	readonly verticalRun: Int32Array;
}

export type CrossingsResult =
	| { readonly status: 'found'; readonly crossings: Crossings }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };

/** Whether the net has a strap of its own on a layer between the two. */
function hasStrapBetween(
	{ layerCount }: PlanIndex,
	{ groupStart }: Runs,
	net: number,
	low: number,
	high: number
): boolean {
	for (let layer = low + 1; layer < high; layer++) {
		const group = net * layerCount + layer;
		if (groupStart[group + 1] > groupStart[group]) return true;
	}
	return false;
}

/**
 * All crossings that a via rule joins. A rule that skips layers stands for a via stack; it applies
 * to a net that has no strap anywhere on a layer between. (The model says "where the net has no
 * strap of its own on the layer between"; we read this for the net as a whole, because between two
 * crossings of the outer layers there is nearly always a place without a strap of the middle one.)
 */
export function findCrossings(plan: PlanIndex, runs: Runs): CrossingsResult {
	const { floorplan, layerCount, netCount, layerOf, isHorizontal } = plan;
	const { coordinateNm, startNm, endNm, groupStart } = runs;
	const horizontal = new IntBuffer();
	const vertical = new IntBuffer();
	const batches: CrossingBatch[] = [];

	for (let net = 0; net < netCount; net++) {
		for (const [v, via] of floorplan.vias.entries()) {
			const lower = indexOfId(layerOf, via.lower);
			const upper = indexOfId(layerOf, via.upper);
			if (isHorizontal[lower] === isHorizontal[upper]) continue;
			const low = Math.min(lower, upper);
			const high = Math.max(lower, upper);
			if (hasStrapBetween(plan, runs, net, low, high)) continue;
			const first = horizontal.length;
			const groupH = net * layerCount + (isHorizontal[low] ? low : high);
			const groupV = net * layerCount + (isHorizontal[low] ? high : low);
			const toV = groupStart[groupV + 1];
			for (let h = groupStart[groupH]; h < groupStart[groupH + 1]; h++) {
				const y = coordinateNm[h];
				const endX = endNm[h];
				let q = lowerBound(coordinateNm, groupStart[groupV], toV, startNm[h]);
				for (; q < toV && coordinateNm[q] <= endX; q++) {
					if (startNm[q] > y || endNm[q] < y) continue;
					horizontal.push(h);
					vertical.push(q);
				}
				if (horizontal.length > MAX_NODES) {
					return { status: 'refused', problems: [tooManyCrossings(floorplan.nets[net].id)] };
				}
			}
			if (horizontal.length > first) {
				batches.push({
					via: v,
					net,
					lowerLayer: low,
					first,
					count: horizontal.length - first
				});
			}
		}
	}
	return {
		status: 'found',
		crossings: {
			count: horizontal.length,
			batches,
			horizontalRun: horizontal.toArray(),
			verticalRun: vertical.toArray()
		}
	};
}

function tooManyCrossings(net: string): ModelProblem {
	return {
		path: `nets (${net})`,
		message:
			`its straps and those of the nets before it cross more than ${MAX_NODES} times ` +
			`(expected larger pitches or smaller regions)`,
		subject: net
	};
}
