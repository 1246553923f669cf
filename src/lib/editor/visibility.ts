import type { Floorplan } from '#lib/floorplan/index.ts';
import type { PlacedList } from '#lib/floorplan/edits/index.ts';

/** What is drawn, and so what can be hit. */
export interface Visibility {
	readonly lists: Readonly<Record<PlacedList, boolean>>;
	/** Layers whose straps are drawn, by id. */
	readonly layers: ReadonlySet<string>;
	/** Nets whose straps are drawn, by id. */
	readonly nets: ReadonlySet<string>;
	readonly hasMap: boolean;
}

export function everythingVisible({ layers, nets }: Floorplan): Visibility {
	return {
		lists: { regulators: true, feeds: true, blocks: true, keepouts: true },
		layers: new Set(layers.map(({ id }) => id)),
		nets: new Set(nets.map(({ id }) => id)),
		hasMap: true
	};
}

/** How many of the plan's placed items are hidden. */
export function hiddenCount(floorplan: Floorplan, { lists }: Visibility): number {
	return (Object.keys(lists) as PlacedList[])
		.filter((list) => !lists[list])
		.reduce((sum, list) => sum + floorplan[list].length, 0);
}
