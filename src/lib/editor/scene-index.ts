import RBush from 'rbush';
import { boundsOf, containsPoint, type Bounds } from '#lib/geometry/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { PlacedList } from '#lib/floorplan/edits/index.ts';
import { footprintOf } from '#lib/floorplan/legality/index.ts';
import type { DiePoint } from './points.ts';
import { keyOf, type ItemKey } from './selection.ts';

export interface SceneEntry extends Bounds {
	readonly key: ItemKey;
	readonly list: PlacedList;
	/** Place in the document's list. */
	readonly index: number;
}

/** What lies on top is hit first. */
const HIT_ORDER: readonly PlacedList[] = ['regulators', 'feeds', 'blocks', 'keepouts'];

/** Distance from a point to a rectangle, um; 0 inside. */
export function distanceUm({ minX, minY, maxX, maxY }: Bounds, x: number, y: number): number {
	return Math.hypot(Math.max(0, minX - x, x - maxX), Math.max(0, minY - y, y - maxY));
}

/** Where the placed items of a document are, for hits, marquees and culling. */
export class SceneIndex {
	readonly floorplan: Floorplan;
	readonly #tree = new RBush<SceneEntry>();
	readonly #byKey = new Map<ItemKey, SceneEntry>();

	constructor(floorplan: Floorplan) {
		this.floorplan = floorplan;
		const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
		const entries: SceneEntry[] = [];
		const add = (list: PlacedList, index: number, id: string, bounds: Bounds | null) => {
			if (bounds) entries.push({ ...bounds, key: keyOf({ list, id }), list, index });
		};
		floorplan.regulators.forEach((item, i) =>
			add('regulators', i, item.id, footprintOf(cells, item))
		);
		floorplan.feeds.forEach(({ id, xUm, yUm }, i) =>
			add('feeds', i, id, { minX: xUm, minY: yUm, maxX: xUm, maxY: yUm })
		);
		floorplan.blocks.forEach(({ id, outline }, i) => add('blocks', i, id, boundsOf(outline)));
		floorplan.keepouts.forEach(({ id, outline }, i) => add('keepouts', i, id, boundsOf(outline)));
		this.#tree.load(entries);
		for (const entry of entries) this.#byKey.set(entry.key, entry);
	}

	boundsOf(key: ItemKey): Bounds | undefined {
		return this.#byKey.get(key);
	}

	/**
	 * The topmost item at a point. Bumps and regulators, which can be small, are hit within `reachUm`
	 * too, the nearest first.
	 */
	hit([x, y]: DiePoint, reachUm: number, isShown: (list: PlacedList) => boolean): ItemKey | null {
		const found = this.#tree
			.search({ minX: x - reachUm, minY: y - reachUm, maxX: x + reachUm, maxY: y + reachUm })
			.filter((entry) => isShown(entry.list) && this.#contains(entry, x, y))
			.sort(
				(a, b) =>
					HIT_ORDER.indexOf(a.list) - HIT_ORDER.indexOf(b.list) ||
					distanceUm(a, x, y) - distanceUm(b, x, y) ||
					b.index - a.index
			);
		return found[0]?.key ?? null;
	}

	#contains(entry: SceneEntry, x: number, y: number): boolean {
		if (entry.list === 'feeds' || entry.list === 'regulators') return true;
		if (distanceUm(entry, x, y) > 0) return false;
		return containsPoint(this.floorplan[entry.list][entry.index].outline, x, y);
	}

	/** Items whose bounds lie wholly in a rectangle: the marquee's rule. */
	enclosed(bounds: Bounds, isShown: (list: PlacedList) => boolean): ItemKey[] {
		return this.#tree
			.search(bounds)
			.filter(
				(entry) =>
					isShown(entry.list) &&
					entry.minX >= bounds.minX &&
					entry.maxX <= bounds.maxX &&
					entry.minY >= bounds.minY &&
					entry.maxY <= bounds.maxY
			)
			.map(({ key }) => key);
	}

	/** Shown items that a rectangle touches. */
	boundsInView(bounds: Bounds, isShown: (list: PlacedList) => boolean): SceneEntry[] {
		return this.#tree.search(bounds).filter(({ list }) => isShown(list));
	}

	/** The shown item nearest to a point within a reach, um; of equally near ones the smallest. */
	nearest(
		[x, y]: DiePoint,
		reachUm: number,
		isShown: (list: PlacedList) => boolean
	): { readonly key: ItemKey; readonly distanceUm: number } | null {
		const area = (entry: Bounds) => (entry.maxX - entry.minX) * (entry.maxY - entry.minY);
		const [best] = this.#tree
			.search({ minX: x - reachUm, minY: y - reachUm, maxX: x + reachUm, maxY: y + reachUm })
			.filter(({ list }) => isShown(list))
			.map((entry) => ({ entry, away: distanceUm(entry, x, y) }))
			.filter(({ away }) => away <= reachUm)
			.sort((a, b) => a.away - b.away || area(a.entry) - area(b.entry));
		return best ? { key: best.entry.key, distanceUm: best.away } : null;
	}

	/** Places in their lists of the items that a rectangle touches. */
	inView(bounds: Bounds): Record<PlacedList, number[]> {
		const shown: Record<PlacedList, number[]> = {
			regulators: [],
			feeds: [],
			blocks: [],
			keepouts: []
		};
		for (const { list, index } of this.#tree.search(bounds)) shown[list].push(index);
		for (const indices of Object.values(shown)) indices.sort((a, b) => a - b);
		return shown;
	}
}
