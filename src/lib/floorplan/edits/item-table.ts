import type { Item } from './operation.ts';

/**
 * A list of items under change: a copy of the list (never of its items) and the place of each id.
 * The places are worked out when first asked for and again after a removal or an insertion before
 * the end, so that a long run of field changes or additions stays linear.
 */
export class ItemTable {
	readonly items: Item[];
	#places: Map<string, number> | null = null;

	constructor(items: readonly Item[]) {
		this.items = [...items];
	}

	/** Place of the item, or -1. */
	indexOf(id: string): number {
		this.#places ??= new Map(this.items.map((item, index) => [item.id, index]));
		return this.#places.get(id) ?? -1;
	}

	insert(index: number, item: Item): void {
		if (index === this.items.length) this.#places?.set(item.id, index);
		else this.#places = null;
		this.items.splice(index, 0, item);
	}

	remove(index: number): void {
		this.items.splice(index, 1);
		this.#places = null;
	}

	/** Puts another item with the same id in place of one. */
	replace(index: number, item: Item): void {
		this.items[index] = item;
	}
}
