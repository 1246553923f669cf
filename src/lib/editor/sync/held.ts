import { jsonEquals, type Floorplan, type Problem } from '#lib/floorplan/index.ts';
import { findItem, type Conflict, type Edit, type Operation } from '#lib/floorplan/edits/index.ts';
import { PlaceSet, placeOf, placeOfConflict, wholeOf } from './places.ts';
import { operationsFor, wishesOf, type RemovedItems, type Wish } from './wishes.ts';

/** Edits taken out of the queue until the person decides; the later ones build on the first. */
export interface Held {
	/** Id of the first edit. */
	readonly id: string;
	edits: readonly Edit[];
	/** Why the server or the format will not take it; null where somebody else's change stands against it. */
	readonly refusal: { readonly reason: string; readonly problems: readonly Problem[] } | null;
	/**
	 * Places that were once found in conflict. They stay so until the document holds what the edits
	 * want, so that nothing is sent behind the person's back when a value happens to come back.
	 */
	readonly disputed: Set<string>;
}

/** Who touched a place last. */
export interface Author {
	readonly by: string;
	readonly at: string;
}

/** One thing that two people changed. `mine` or `theirs` is absent where it is removed. */
export type ConflictPlace = Omit<Conflict, 'operation'>;

/** An edit that another person's change stands against, for a choice between the two. */
export interface ConflictReport {
	readonly id: string;
	readonly label: string;
	/** Ids of all edits that wait for the decision. */
	readonly edits: readonly string[];
	readonly places: readonly ConflictPlace[];
	/** Who changed it; null where the edits seen here do not tell. */
	readonly who: Author | null;
}

/** An edit that cannot be saved, and why. */
export interface RefusalReport {
	readonly id: string;
	readonly label: string;
	/** Ids of all edits that are given up together. */
	readonly edits: readonly string[];
	readonly reason: string;
	readonly problems: readonly Problem[];
}

export function operationsOf({ edits }: Held): Operation[] {
	return edits.flatMap(({ operations }) => operations);
}

/** Whether operations touch what held edits touch, so that they cannot stand without them. */
export function buildsOn(operations: readonly Operation[], held: Held): boolean {
	const places = new PlaceSet(operationsOf(held).map(placeOf));
	return operations.some((operation) => places.overlaps(placeOf(operation)));
}

/** What held edits want of one place: what they found there first and leave in the end. */
interface Claim extends Omit<ConflictPlace, 'theirs' | 'reason'> {
	readonly place: string;
	readonly found: unknown;
	/** Whether they would make the item. */
	readonly isNew: boolean;
}

/** The claims of operations, one per place; a claim on an item stands for all of its fields. */
function claimsOf(operations: readonly Operation[]): Claim[] {
	const wishes = wishesOf(operations);
	const claims = new Map<string, Claim>();
	/** What the first operation on each field found, by item. */
	const fieldsFound = new Map<string, Record<string, unknown>>();
	for (const operation of operations) {
		const place = placeOf(operation);
		const whole = wholeOf(place);
		if (claims.has(place) || claims.has(whole)) continue;
		const wish = wishes.get(place) ?? wishes.get(whole);
		const mine = wish && leaves(wish);
		if (operation.op === 'set') {
			const { property, from } = operation;
			claims.set(place, { place, property, mine, found: from, isNew: false });
		} else if (operation.op === 'change') {
			const { list, id, field, from } = operation;
			const fields = fieldsFound.get(whole) ?? {};
			if (!Object.hasOwn(fields, field)) fieldsFound.set(whole, { ...fields, [field]: from });
			// A removal that follows makes the claim for the whole item.
			if (wish?.kind !== 'field') continue;
			claims.set(place, { place, list, id, field, mine, found: from, isNew: false });
		} else {
			const { list, item } = operation;
			const isNew = operation.op === 'insert';
			const found = isNew ? undefined : { ...item, ...fieldsFound.get(whole) };
			claims.set(place, { place, list, id: item.id, mine, found, isNew });
		}
	}
	return [...claims.values()];
}

/** The value that a wish leaves at its place; undefined where it removes. */
function leaves(wish: Wish): unknown {
	if (wish.kind === 'present') return wish.item;
	return wish.kind === 'absent' ? undefined : wish.to;
}

/**
 * What stands against held edits in the document as it is now: places that hold neither what the
 * person had seen before the first of them nor what the last of them leaves.
 */
export function conflictsOf(held: Held, floorplan: Floorplan): ConflictPlace[] {
	return claimsOf(operationsOf(held)).flatMap(({ place, found, isNew, ...claim }) => {
		const { list, id, field, property } = claim;
		const item = list && id !== undefined ? findItem(floorplan, list, id) : undefined;
		const value: unknown = property
			? floorplan[property]
			: item && field !== undefined
				? Reflect.get(item, field)
				: item;
		const isGone = property === undefined && item === undefined;
		// An absent field of an item that is gone is neither as found nor as wanted.
		const isFieldOfNothing = isGone && field !== undefined;
		if (!isFieldOfNothing) {
			if (jsonEquals(value, claim.mine)) return [];
			if (jsonEquals(value, found) && !held.disputed.has(place)) return [];
		}
		held.disputed.add(place);
		const theirs = value === undefined ? {} : { theirs: value };
		return [{ ...claim, ...theirs, reason: isGone ? 'gone' : isNew ? 'taken' : 'changed' }];
	});
}

export function reportConflict(
	held: Held,
	places: readonly ConflictPlace[],
	authors: ReadonlyMap<string, Author>
): ConflictReport {
	const who = places
		.map((conflict) => {
			const place = placeOfConflict(conflict);
			return authors.get(place) ?? authors.get(wholeOf(place));
		})
		.find((author) => author !== undefined);
	const edits = held.edits.map(({ id }) => id);
	return { id: held.id, label: held.edits[0].label, edits, who: who ?? null, places };
}

/** Operations that put the whole of held edits through, over what others have changed. */
export function mineOperations(
	held: Held,
	floorplan: Floorplan,
	removed: RemovedItems
): Operation[] {
	return operationsFor(floorplan, wishesOf(operationsOf(held)).values(), removed);
}

/** Operations that put through what held edits leave beside the places of the conflict. */
export function theirsOperations(held: Held, floorplan: Floorplan): Operation[] {
	const given = new PlaceSet(conflictsOf(held, floorplan).map(placeOfConflict));
	const rest = [...wishesOf(operationsOf(held))].filter(([place]) => !given.overlaps(place));
	return operationsFor(
		floorplan,
		rest.map(([, wish]) => wish),
		new Map()
	);
}
