import type { ItemReference } from '#lib/floorplan/edits/index.ts';
import type { ItemList } from '#lib/floorplan/index.ts';

/** An item's list and id as one key, for sets. */
export type ItemKey = `${ItemList}:${string}`;

export function keyOf({ list, id }: ItemReference): ItemKey {
	return `${list}:${id}`;
}

export function referenceOf(key: ItemKey): ItemReference {
	const colon = key.indexOf(':');
	return { list: key.slice(0, colon) as ItemList, id: key.slice(colon + 1) };
}
