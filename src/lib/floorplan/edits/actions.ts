import { jsonEquals } from '../canonical.ts';
import { onGridUm, type OutlineUm } from '../primitives.ts';
import type { Floorplan, ItemList, ItemOf } from '../document.ts';
import type { Edit, Item, Operation, Property } from './operation.ts';

/** An item of a document by its list and id. */
export interface ItemReference {
	readonly list: ItemList;
	readonly id: string;
}

/** What an action of a person does, before it gets its identity. */
export type EditDraft = Pick<Edit, 'label' | 'operations'>;

/** Lists whose items stand somewhere and can be moved. */
export const PLACED_LISTS = ['regulators', 'feeds', 'blocks', 'keepouts'] as const;
export type PlacedList = (typeof PLACED_LISTS)[number];

const SINGULAR: Record<ItemList, string> = {
	layers: 'layer',
	vias: 'via rule',
	nets: 'net',
	straps: 'strap pattern',
	feeds: 'bump',
	cells: 'cell',
	regulators: 'regulator',
	blocks: 'block',
	keepouts: 'keep-out',
	modes: 'mode',
	corners: 'corner'
};

/** "regulator R1", "3 regulators" or "4 items". */
export function describeItems(references: readonly ItemReference[]): string {
	const lists = new Set(references.map(({ list }) => list));
	if (lists.size !== 1) return `${references.length} items`;
	const word = SINGULAR[references[0].list];
	return references.length === 1 ? `${word} ${references[0].id}` : `${references.length} ${word}s`;
}

export function isPlaced(list: ItemList): list is PlacedList {
	return (PLACED_LISTS as readonly ItemList[]).includes(list);
}

/** Finds an item; undefined when it is gone. */
export function findItem<L extends ItemList>(
	floorplan: Floorplan,
	list: L,
	id: string
): ItemOf<L> | undefined {
	return (floorplan[list] as ItemOf<L>[]).find((item) => item.id === id);
}

function addUm(um: number, distanceUm: number): number {
	return onGridUm(um + distanceUm);
}

function moveOutline(outline: OutlineUm, dxUm: number, dyUm: number): OutlineUm {
	return outline.map(([x, y]) => [addUm(x, dxUm), addUm(y, dyUm)]);
}

function change(list: ItemList, id: string, field: string, from: unknown, to: unknown): Operation {
	return { op: 'change', list, id, field, from, to } as Operation;
}

/** Moves placed items by a distance, um; other items and fixed regulators stay where they are. */
export function moveItems(
	floorplan: Floorplan,
	references: readonly ItemReference[],
	dxUm: number,
	dyUm: number
): EditDraft {
	const moved: ItemReference[] = [];
	const operations = references.flatMap(({ list, id }): Operation[] => {
		if (list === 'regulators' || list === 'feeds') {
			const item = findItem(floorplan, list, id);
			if (!item || ('fixed' in item && item.fixed)) return [];
			moved.push({ list, id });
			return [
				...(dxUm === 0 ? [] : [change(list, id, 'xUm', item.xUm, addUm(item.xUm, dxUm))]),
				...(dyUm === 0 ? [] : [change(list, id, 'yUm', item.yUm, addUm(item.yUm, dyUm))])
			];
		}
		if (list === 'blocks' || list === 'keepouts') {
			const item = findItem(floorplan, list, id);
			if (!item || (dxUm === 0 && dyUm === 0)) return [];
			moved.push({ list, id });
			return [change(list, id, 'outline', item.outline, moveOutline(item.outline, dxUm, dyUm))];
		}
		return [];
	});
	return { label: `Move ${describeItems(moved)}`, operations };
}

/** Adds items at the end of their list. */
export function addItems<L extends ItemList>(
	floorplan: Floorplan,
	list: L,
	items: readonly ItemOf<L>[]
): EditDraft {
	const index = floorplan[list].length;
	return {
		label: `Add ${describeItems(items.map(({ id }) => ({ list, id })))}`,
		operations: items.map((item, k) => ({
			op: 'insert',
			list,
			index: index + k,
			item: item as Item
		}))
	};
}

/** Removes items; fixed regulators stay. */
export function removeItems(floorplan: Floorplan, references: readonly ItemReference[]): EditDraft {
	const removed: (ItemReference & { index: number; item: Item })[] = [];
	for (const { list, id } of references) {
		const index = floorplan[list].findIndex((item) => item.id === id);
		if (index === -1) continue;
		const item = floorplan[list][index];
		if (list === 'regulators' && 'fixed' in item && item.fixed) continue;
		removed.push({ list, id, index, item: item as Item });
	}
	// Highest index first, so that each index holds when its turn comes, and when it is undone.
	removed.sort((a, b) => b.index - a.index);
	return {
		label: `Delete ${describeItems(removed)}`,
		operations: removed.map(({ list, index, item }) => ({ op: 'remove', list, index, item }))
	};
}

/** Sets one field of several items of a list; items that have the value already are left out. */
export function changeField<L extends ItemList>(
	floorplan: Floorplan,
	list: L,
	ids: readonly string[],
	field: string,
	to: unknown
): EditDraft {
	return changeEach(floorplan, list, ids, field, () => to);
}

/** Sets one field of several items of a list, of each to a value made from the item as it is. */
export function changeEach<L extends ItemList>(
	floorplan: Floorplan,
	list: L,
	ids: readonly string[],
	field: string,
	valueFor: (item: ItemOf<L>) => unknown
): EditDraft {
	return {
		label: `Change ${field} of ${describeItems(ids.map((id) => ({ list, id })))}`,
		operations: ids.flatMap((id) => {
			const item = findItem(floorplan, list, id);
			if (!item) return [];
			const from: unknown = Reflect.get(item, field);
			const to = valueFor(item);
			return jsonEquals(from, to) ? [] : [change(list, id, field, from, to)];
		})
	};
}

/** Replaces a property of the document. */
export function setProperty(floorplan: Floorplan, property: Property, to: unknown): EditDraft {
	return {
		label: `Change ${property}`,
		operations: [{ op: 'set', property, from: floorplan[property], to } as Operation]
	};
}

/** An id that none of the taken ones is: the stem with the next free number. */
export function freeId(taken: ReadonlySet<string>, id: string): string {
	if (!taken.has(id)) return id;
	const stem = id.replace(/_\d+$/, '').slice(0, 56);
	let number = 2;
	while (taken.has(`${stem}_${number}`)) number++;
	return `${stem}_${number}`;
}

/** Copies of placed items, moved by a distance, um, with ids of their own. */
export function duplicateItems(
	floorplan: Floorplan,
	references: readonly ItemReference[],
	dxUm: number,
	dyUm: number
): EditDraft & { copies: ItemReference[] } {
	const copies: ItemReference[] = [];
	const operations: Operation[] = [];
	for (const list of PLACED_LISTS) {
		const taken = new Set(floorplan[list].map(({ id }) => id));
		let index = floorplan[list].length;
		for (const reference of references) {
			const item = reference.list === list && findItem(floorplan, list, reference.id);
			if (!item) continue;
			const id = freeId(taken, item.id);
			taken.add(id);
			const placed =
				'outline' in item
					? { ...item, id, outline: moveOutline(item.outline, dxUm, dyUm) }
					: { ...item, id, xUm: addUm(item.xUm, dxUm), yUm: addUm(item.yUm, dyUm) };
			operations.push({ op: 'insert', list, index: index++, item: placed as Item });
			copies.push({ list, id });
		}
	}
	return { label: `Duplicate ${describeItems(copies)}`, operations, copies };
}
