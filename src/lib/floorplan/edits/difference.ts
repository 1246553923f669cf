import { jsonEquals } from '../canonical.ts';
import { ITEM_LISTS, type Floorplan, type ItemList } from '../document.ts';
import { PROPERTIES, type Item, type Operation } from './operation.ts';

function fieldsBetween(list: ItemList, from: Item, to: Item): Operation[] {
	const fields = new Set([...Object.keys(from), ...Object.keys(to)]);
	return [...fields]
		.filter((field) => !jsonEquals(from[field], to[field]))
		.map((field) => ({
			op: 'change',
			list,
			id: from.id,
			field,
			...(from[field] === undefined ? {} : { from: from[field] }),
			...(to[field] === undefined ? {} : { to: to[field] })
		}));
}

/**
 * Ids of a list that both sides have, in an order that both sides have them in: what stands
 * elsewhere has to be taken out and put in again. Longest increasing run by patience sorting
 * (Fredman, "On computing the length of longest increasing subsequences", 1975).
 */
function steadyIds(from: readonly Item[], to: readonly Item[]): Set<string> {
	const placeIn = new Map(to.map(({ id }, index) => [id, index]));
	const shared = from.filter(({ id }) => placeIn.has(id));
	const places = shared.map(({ id }) => placeIn.get(id) ?? 0);
	/** Of each length, the member that ends the run of that length with the smallest place. */
	const ends: number[] = [];
	const before = new Int32Array(places.length).fill(-1);
	places.forEach((place, member) => {
		let low = 0;
		let high = ends.length;
		while (low < high) {
			const middle = (low + high) >> 1;
			if (places[ends[middle]] < place) low = middle + 1;
			else high = middle;
		}
		if (low > 0) before[member] = ends[low - 1];
		ends[low] = member;
	});
	const steady = new Set<string>();
	for (let member = ends.at(-1) ?? -1; member !== -1; member = before[member]) {
		steady.add(shared[member].id);
	}
	return steady;
}

function listBetween(list: ItemList, from: readonly Item[], to: readonly Item[]): Operation[] {
	const steady = steadyIds(from, to);
	const present = new Map(from.map((item) => [item.id, item]));
	const removed = from
		.flatMap((item, index): Operation[] =>
			steady.has(item.id) ? [] : [{ op: 'remove', list, index, item }]
		)
		// Highest first, so that each index holds when its turn comes.
		.reverse();
	const inserted = to.flatMap((item, index): Operation[] =>
		steady.has(item.id) ? [] : [{ op: 'insert', list, index, item }]
	);
	const changed = to.flatMap((item) => {
		const before = steady.has(item.id) ? present.get(item.id) : undefined;
		return before ? fieldsBetween(list, before, item) : [];
	});
	return [...removed, ...inserted, ...changed];
}

/** The operations that make one document into another, to the last field and the order of its lists. */
export function operationsBetween(from: Floorplan, to: Floorplan): Operation[] {
	const set = PROPERTIES.filter((property) => !jsonEquals(from[property], to[property])).map(
		(property): Operation => ({
			op: 'set',
			property,
			...(from[property] === undefined ? {} : { from: from[property] }),
			...(to[property] === undefined ? {} : { to: to[property] })
		})
	);
	const lists = ITEM_LISTS.flatMap((list) =>
		listBetween(list, from[list] as readonly Item[], to[list] as readonly Item[])
	);
	return [...set, ...lists];
}
