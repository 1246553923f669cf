import type { Conflict, Operation } from '#lib/floorplan/edits/index.ts';

/**
 * Names of the places of a document that an operation can touch: "list id field" for a field,
 * "list id" for a whole item, the property's name for a property. Ids hold no spaces.
 */
export function itemPlace(list: string, id: string): string {
	return `${list} ${id}`;
}

export function fieldPlace(list: string, id: string, field: string): string {
	return `${list} ${id} ${field}`;
}

export function placeOf(operation: Operation): string {
	switch (operation.op) {
		case 'set':
			return operation.property;
		case 'change':
			return fieldPlace(operation.list, operation.id, operation.field);
		case 'insert':
		case 'remove':
			return itemPlace(operation.list, operation.item.id);
	}
}

/** The place that a conflict is about: the whole item where it is gone or its id is taken. */
export function placeOfConflict({
	list,
	id,
	field,
	property,
	reason
}: Omit<Conflict, 'operation'>): string {
	if (list === undefined || id === undefined) return property ?? '';
	return field === undefined || reason === 'gone'
		? itemPlace(list, id)
		: fieldPlace(list, id, field);
}

/** The item that a place belongs to, or the property itself. */
export function wholeOf(place: string): string {
	return place.split(' ', 2).join(' ');
}

/** A set of places that knows what overlaps: a field with its own item, an item with its fields. */
export class PlaceSet {
	readonly #places = new Set<string>();
	readonly #wholes = new Set<string>();

	constructor(places: Iterable<string> = []) {
		this.add(places);
	}

	add(places: Iterable<string>): void {
		for (const place of places) {
			this.#places.add(place);
			this.#wholes.add(wholeOf(place));
		}
	}

	overlaps(place: string): boolean {
		const whole = wholeOf(place);
		return (
			this.#places.has(whole) ||
			(place === whole ? this.#wholes.has(whole) : this.#places.has(place))
		);
	}
}
