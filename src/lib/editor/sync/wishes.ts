import { jsonEquals, type Floorplan, type ItemList } from '#lib/floorplan/index.ts';
import type { Item, Operation, Property } from '#lib/floorplan/edits/index.ts';
import { fieldPlace, itemPlace, wholeOf } from './places.ts';

/** What a run of operations wants to be true in the end, whatever it found. */
export type Wish =
	| {
			readonly kind: 'field';
			readonly list: ItemList;
			readonly id: string;
			readonly field: string;
			readonly to: unknown;
	  }
	| {
			readonly kind: 'present';
			readonly list: ItemList;
			readonly id: string;
			readonly index: number;
			readonly item: Item;
	  }
	| { readonly kind: 'absent'; readonly list: ItemList; readonly id: string }
	| { readonly kind: 'property'; readonly property: Property; readonly to: unknown };

/** Items that somebody removed, by place, so that a person may bring one back. */
export type RemovedItems = ReadonlyMap<string, { readonly index: number; readonly item: Item }>;

function withField(item: Item, field: string, to: unknown): Item {
	const { [field]: _replaced, ...rest } = item;
	return to === undefined ? { ...rest, id: item.id } : { ...item, [field]: to };
}

/** The wishes of operations by their places, in the order in which they first came up. */
export function wishesOf(operations: readonly Operation[]): Map<string, Wish> {
	const wishes = new Map<string, Wish>();
	const forgetFields = (whole: string) => {
		for (const place of wishes.keys()) if (wholeOf(place) === whole) wishes.delete(place);
	};
	for (const operation of operations) {
		if (operation.op === 'set') {
			const { property, to } = operation;
			wishes.set(property, { kind: 'property', property, to });
			continue;
		}
		const { list } = operation;
		if (operation.op === 'change') {
			const { id, field, to } = operation;
			const whole = itemPlace(list, id);
			const made = wishes.get(whole);
			if (made?.kind === 'present') {
				wishes.set(whole, { ...made, item: withField(made.item, field, to) });
			} else {
				wishes.set(fieldPlace(list, id, field), { kind: 'field', list, id, field, to });
			}
			continue;
		}
		const { id } = operation.item;
		const whole = itemPlace(list, id);
		forgetFields(whole);
		wishes.set(
			whole,
			operation.op === 'insert'
				? { kind: 'present', list, id, index: operation.index, item: operation.item }
				: { kind: 'absent', list, id }
		);
	}
	return wishes;
}

/**
 * Operations that make wishes true in the document as it is now; none where they are true already.
 * A field of an item that is gone brings the item back, where it is known what it was.
 */
export function operationsFor(
	floorplan: Floorplan,
	wishes: Iterable<Wish>,
	removed: RemovedItems
): Operation[] {
	const operations: Operation[] = [];
	const restored = new Map<string, Extract<Operation, { op: 'insert' }>>();
	const change = (list: ItemList, item: Item, field: string, to: unknown) => {
		const from = item[field];
		if (!jsonEquals(from, to))
			operations.push({ op: 'change', list, id: item.id, field, from, to });
	};
	for (const wish of wishes) {
		if (wish.kind === 'property') {
			const from = floorplan[wish.property];
			if (!jsonEquals(from, wish.to)) {
				operations.push({ op: 'set', property: wish.property, from, to: wish.to });
			}
			continue;
		}
		const { list, id } = wish;
		const whole = itemPlace(list, id);
		const items = floorplan[list] as readonly Item[];
		const index = items.findIndex((item) => item.id === id);
		const present = index === -1 ? undefined : items[index];
		if (wish.kind === 'absent') {
			if (present) operations.push({ op: 'remove', list, index, item: present });
		} else if (wish.kind === 'present') {
			if (!present) {
				operations.push({ op: 'insert', list, index: wish.index, item: wish.item });
				continue;
			}
			const fields = new Set([...Object.keys(present), ...Object.keys(wish.item)]);
			fields.delete('id');
			for (const field of fields) change(list, present, field, wish.item[field]);
		} else if (present) {
			change(list, present, wish.field, wish.to);
		} else {
			const earlier = restored.get(whole);
			const gone = earlier ?? removed.get(whole);
			if (!gone) continue;
			const insert: Extract<Operation, { op: 'insert' }> = earlier ?? {
				op: 'insert',
				list,
				index: gone.index,
				item: gone.item
			};
			insert.item = withField(insert.item, wish.field, wish.to);
			if (!earlier) {
				restored.set(whole, insert);
				operations.push(insert);
			}
		}
	}
	return operations;
}
