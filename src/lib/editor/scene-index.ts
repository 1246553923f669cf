import RBush from 'rbush';
import { boundsOf, containsPoint, type Bounds } from '#lib/geometry/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { PlacedList } from '#lib/floorplan/edits/index.ts';
import { footprintOf } from '#lib/floorplan/legality/index.ts';
import type { DiePoint } from './points.ts';
import { keyOf, type ItemKey } from './selection.ts';

interface Entry extends Bounds {
	readonly key: ItemKey;
	readonly list: PlacedList;
	/** Place in the document's list. */
	readonly index: number;
}

/** What lies on top is hit first. */
const HIT_ORDER: readonly PlacedList[] = ['regulators', 'feeds', 'blocks', 'keepouts'];

/** Where the placed items of a document are, for hits, marquees and culling. */
export class SceneIndex {
	readonly floorplan: Floorplan;
	readonly #tree = new RBush<Entry>();
	readonly #byKey = new Map<ItemKey, Entry>();

	constructor(floorplan: Floorplan) {
		this.floorplan = floorplan;
		const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
		const entries: Entry[] = [];
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

	/** The topmost item at a point, or within `reachUm` of it for bumps, which have no size. */
	hit([x, y]: DiePoint, reachUm: number, isShown: (list: PlacedList) => boolean): ItemKey | null {
		const found = this.#tree
			.search({ minX: x - reachUm, minY: y - reachUm, maxX: x + reachUm, maxY: y + reachUm })
			.filter((entry) => isShown(entry.list) && this.#contains(entry, x, y))
			.sort((a, b) => HIT_ORDER.indexOf(a.list) - HIT_ORDER.indexOf(b.list) || b.index - a.index);
		return found[0]?.key ?? null;
	}

	#contains(entry: Entry, x: number, y: number): boolean {
		if (entry.list === 'feeds') return true;
		const isInBounds = x >= entry.minX && x <= entry.maxX && y >= entry.minY && y <= entry.maxY;
		if (entry.list === 'regulators' || !isInBounds) return isInBounds;
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
