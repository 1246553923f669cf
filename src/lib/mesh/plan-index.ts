import { toNm } from '#lib/floorplan/index.ts';
import type { Floorplan, OutlineUm } from '#lib/floorplan/index.ts';
import type { Outline } from '#lib/geometry/index.ts';

/** A strap pattern with its references as indices and its lengths in nm. */
export interface StrapPattern {
	readonly id: string;
	readonly net: number;
	readonly layer: number;
	readonly pitchNm: number;
	readonly widthNm: number;
	readonly offsetNm: number;
}

/** The floorplan with the look-ups that meshing needs. */
export interface PlanIndex {
	readonly floorplan: Floorplan;
	readonly netCount: number;
	readonly layerCount: number;
	/** Index of each net and layer by id. */
	readonly netOf: ReadonlyMap<string, number>;
	readonly layerOf: ReadonlyMap<string, number>;
	/** Whether the straps of each layer run along x. */
	readonly isHorizontal: readonly boolean[];
	/** In the order of `floorplan.straps`. */
	readonly patterns: readonly StrapPattern[];
	/** Index of the ground net, or -1 where the ground is ideal. */
	readonly groundNet: number;
}

/** An outline in whole nanometres. */
export function outlineToNm(outline: OutlineUm): Outline {
	return outline.map(([x, y]) => [toNm(x), toNm(y)] as const);
}

function indexById(items: readonly { readonly id: string }[]): Map<string, number> {
	return new Map(items.map((item, index) => [item.id, index]));
}

/** The index behind a reference that the parser has already checked. */
export function indexOfId(indices: ReadonlyMap<string, number>, id: string): number {
	const index = indices.get(id);
	if (index === undefined) throw new Error(`"${id}" is not in the document it was parsed from`);
	return index;
}

/** Look-ups over a parsed floorplan. */
export function indexPlan(floorplan: Floorplan): PlanIndex {
	const netOf = indexById(floorplan.nets);
	const layerOf = indexById(floorplan.layers);
	return {
		floorplan,
		netCount: floorplan.nets.length,
		layerCount: floorplan.layers.length,
		netOf,
		layerOf,
		isHorizontal: floorplan.layers.map((layer) => layer.direction === 'horizontal'),
		patterns: floorplan.straps.map((strap) => ({
			id: strap.id,
			net: indexOfId(netOf, strap.net),
			layer: indexOfId(layerOf, strap.layer),
			pitchNm: toNm(strap.pitchUm),
			widthNm: toNm(strap.widthUm),
			offsetNm: toNm(strap.offsetUm)
		})),
		groundNet: floorplan.nets.findIndex((net) => net.kind === 'ground')
	};
}
