import { NearestPoint } from './nearest-point.ts';
import type { PlanIndex } from './plan-index.ts';
import type { Points } from './points.ts';
import type { Runs } from './runs.ts';
import { outermostLayer } from './taps.ts';

/**
 * A test for places whose local ground (see `NetworkNodes.localGround`) lies on a part of the
 * ground net without a feed, so that current cannot return from there; null where no place is like
 * that. The nearest strap counts, connected or not: a load beside a loose ground strap is a fault
 * of the plan that a connected strap farther away must not hide.
 */
export function openGroundTest(
	plan: PlanIndex,
	runs: Runs,
	points: Points,
	isSourced: Uint8Array
): ((xNm: number, yNm: number) => boolean) | null {
	if (plan.groundNet < 0) return null;
	const layer = outermostLayer(plan, runs, plan.groundNet, 1);
	if (layer < 0) return () => true;
	const group = plan.groundNet * plan.layerCount + layer;
	const from = runs.groupStart[group];
	const to = runs.groupStart[group + 1];
	if (!isSourced.subarray(from, to).includes(0)) return null;
	const nearest = new NearestPoint(runs, points, group, new Uint8Array(runs.count).fill(1));
	return (xNm, yNm) => {
		if (plan.isHorizontal[layer]) nearest.find(xNm, yNm);
		else nearest.find(yNm, xNm);
		return isSourced[nearest.foundRun] === 0;
	};
}
