import type { Bounds } from '#lib/geometry/index.ts';
import { onGridUm, type Floorplan } from '#lib/floorplan/index.ts';
import { snapToSite } from '#lib/floorplan/legality/index.ts';
import type { ItemReference } from '#lib/floorplan/edits/index.ts';
import { findItem } from '#lib/floorplan/edits/index.ts';

/** Step to which things that need no site are moved, um. */
const FREE_STEP_UM = 1;
/** Reach of snapping to neighbours on screen, px, the same at every zoom. */
export const SNAP_REACH_PX = 6;
/** Half a nanometre, um: coordinates closer than this are the same. */
const SAME_UM = 5e-4;

/** A line along which edges or centres of things agree. */
export interface Guide {
	/** `x` is a vertical line at x = atUm, `y` a horizontal one at y = atUm. */
	readonly axis: 'x' | 'y';
	readonly atUm: number;
	readonly fromUm: number;
	readonly toUm: number;
}

export interface SnapRequest {
	readonly floorplan: Floorplan;
	/** What the hand holds. */
	readonly grabbed: ItemReference;
	/** Where its rectangle was at the start, um. */
	readonly bounds: Bounds | undefined;
	/** How far the hand has moved, um. */
	readonly dxUm: number;
	readonly dyUm: number;
	/** Rectangles with which edges and centres may come to agree. */
	readonly neighbours: readonly Bounds[];
	readonly pxPerUm: number;
	/** Only the nanometre grid counts. */
	readonly isSuspended: boolean;
}

export interface Snapped {
	readonly dxUm: number;
	readonly dyUm: number;
	readonly guides: readonly Guide[];
}

/** Where a thing's own reference point is, um: the origin of a regulator, a bump's place, a corner. */
function anchorOf(
	floorplan: Floorplan,
	{ list, id }: ItemReference
): readonly [number, number] | null {
	if (list === 'regulators' || list === 'feeds') {
		const item = findItem(floorplan, list, id);
		return item ? [item.xUm, item.yUm] : null;
	}
	if (list === 'blocks' || list === 'keepouts') {
		return findItem(floorplan, list, id)?.outline[0] ?? null;
	}
	return null;
}

/**
 *       low    middle   high
 *        |       |       |        what moves: each of these three
 *   -----+-------+-------+-----   may meet each of these three of a neighbour
 */
function stops(low: number, high: number): readonly number[] {
	return [low, (low + high) / 2, high];
}

/** The smallest correction with which one of our stops meets one of theirs; null out of reach. */
function alignment(
	own: readonly number[],
	theirs: readonly (readonly number[])[],
	reachUm: number
): number | null {
	let best: number | null = null;
	for (const stop of theirs.flat()) {
		for (const one of own) {
			const correction = stop - one;
			if (Math.abs(correction) > reachUm) continue;
			if (best === null || Math.abs(correction) < Math.abs(best)) best = correction;
		}
	}
	return best;
}

function shifted(bounds: Bounds, dxUm: number, dyUm: number): Bounds {
	return {
		minX: bounds.minX + dxUm,
		minY: bounds.minY + dyUm,
		maxX: bounds.maxX + dxUm,
		maxY: bounds.maxY + dyUm
	};
}

/** Gap between two rectangles, um; 0 where they meet. */
function gapUm(a: Bounds, b: Bounds): number {
	return Math.hypot(
		Math.max(0, a.minX - b.maxX, b.minX - a.maxX),
		Math.max(0, a.minY - b.maxY, b.minY - a.maxY)
	);
}

/** Where one of our stops is one of theirs, the middle first; undefined where none is. */
function metStop(own: readonly number[], theirs: readonly number[]): number | undefined {
	const [low, middle, high] = own;
	return [middle, low, high].find((stop) => theirs.some((one) => Math.abs(one - stop) < SAME_UM));
}

/** One line for each axis along which a rectangle agrees with a neighbour: the nearest that does. */
export function guidesOf(bounds: Bounds, neighbours: readonly Bounds[]): Guide[] {
	const nearest: Partial<Record<Guide['axis'], { guide: Guide; gap: number }>> = {};
	const offer = (axis: Guide['axis'], atUm: number | undefined, gap: number, ends: number[]) => {
		if (atUm === undefined || (nearest[axis] && nearest[axis].gap <= gap)) return;
		const guide = { axis, atUm, fromUm: Math.min(...ends), toUm: Math.max(...ends) };
		nearest[axis] = { guide, gap };
	};
	for (const other of neighbours) {
		const gap = gapUm(bounds, other);
		const x = metStop(stops(bounds.minX, bounds.maxX), stops(other.minX, other.maxX));
		const y = metStop(stops(bounds.minY, bounds.maxY), stops(other.minY, other.maxY));
		offer('x', x, gap, [bounds.minY, bounds.maxY, other.minY, other.maxY]);
		offer('y', y, gap, [bounds.minX, bounds.maxX, other.minX, other.maxX]);
	}
	return Object.values(nearest).map(({ guide }) => guide);
}

/**
 * The distance by which a dragged selection moves, um: the thing that was grabbed comes to rest on
 * a site (regulators), else at an edge or centre of a neighbour that is within reach on screen,
 * else on whole micrometres; the others keep their places beside it.
 */
export function snapMove(request: SnapRequest): Snapped {
	const { floorplan, grabbed, bounds, neighbours } = request;
	const anchor = anchorOf(floorplan, grabbed);
	if (!anchor || !bounds) return { dxUm: 0, dyUm: 0, guides: [] };
	if (request.isSuspended) {
		return { dxUm: onGridUm(request.dxUm), dyUm: onGridUm(request.dyUm), guides: [] };
	}
	const [xUm, yUm] = anchor;
	let [dxUm, dyUm] = [request.dxUm, request.dyUm];
	if (grabbed.list === 'regulators') {
		const [snappedX, snappedY] = snapToSite(floorplan, xUm + dxUm, yUm + dyUm);
		[dxUm, dyUm] = [onGridUm(snappedX - xUm), onGridUm(snappedY - yUm)];
	} else {
		const reachUm = SNAP_REACH_PX / request.pxPerUm;
		const wanted = shifted(bounds, dxUm, dyUm);
		const whole = (um: number) => Math.round(um / FREE_STEP_UM) * FREE_STEP_UM;
		const alongX = alignment(
			stops(wanted.minX, wanted.maxX),
			neighbours.map(({ minX, maxX }) => stops(minX, maxX)),
			reachUm
		);
		const alongY = alignment(
			stops(wanted.minY, wanted.maxY),
			neighbours.map(({ minY, maxY }) => stops(minY, maxY)),
			reachUm
		);
		dxUm = onGridUm(alongX === null ? whole(xUm + dxUm) - xUm : dxUm + alongX);
		dyUm = onGridUm(alongY === null ? whole(yUm + dyUm) - yUm : dyUm + alongY);
	}
	return { dxUm, dyUm, guides: guidesOf(shifted(bounds, dxUm, dyUm), neighbours) };
}

/** One nudge by keys, um: a site for regulators, a micrometre otherwise. */
export function nudgeStepUm(
	floorplan: Floorplan,
	references: readonly ItemReference[]
): readonly [number, number] {
	const hasRegulator = references.some(({ list }) => list === 'regulators');
	return hasRegulator && floorplan.sites ? floorplan.sites.pitchUm : [FREE_STEP_UM, FREE_STEP_UM];
}
