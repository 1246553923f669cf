import type { Floorplan } from '#lib/floorplan/index.ts';
import { snapToSite } from '#lib/floorplan/legality/index.ts';
import type { ItemReference } from '#lib/floorplan/edits/index.ts';
import { findItem } from '#lib/floorplan/edits/index.ts';

/** Step to which things that need no site are moved, um. */
const FREE_STEP_UM = 1;

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
 * The distance by which a dragged selection moves, um: the thing that was grabbed comes to rest on
 * a site (regulators) or on whole micrometres (everything else), the others keep their places
 * beside it.
 */
export function snapMove(
	floorplan: Floorplan,
	grabbed: ItemReference,
	dxUm: number,
	dyUm: number
): readonly [dxUm: number, dyUm: number] {
	const anchor = anchorOf(floorplan, grabbed);
	if (!anchor) return [0, 0];
	const [xUm, yUm] = anchor;
	if (grabbed.list === 'regulators') {
		const [snappedX, snappedY] = snapToSite(floorplan, xUm + dxUm, yUm + dyUm);
		return [snappedX - xUm, snappedY - yUm];
	}
	const snap = (um: number) => Math.round(um / FREE_STEP_UM) * FREE_STEP_UM;
	return [snap(xUm + dxUm) - xUm, snap(yUm + dyUm) - yUm];
}

/** One nudge by keys, um: a site for regulators, a micrometre otherwise. */
export function nudgeStepUm(
	floorplan: Floorplan,
	references: readonly ItemReference[]
): readonly [number, number] {
	const hasRegulator = references.some(({ list }) => list === 'regulators');
	return hasRegulator && floorplan.sites ? floorplan.sites.pitchUm : [FREE_STEP_UM, FREE_STEP_UM];
}
