import { z } from 'zod';
import { jsonEquals } from '../canonical.ts';
import { floorplanSchema, type Floorplan, type ItemList } from '../document.ts';
import { shapeProblems } from '../parse.ts';
import { itemPath, type Problem } from '../problems.ts';
import { checkRules } from '../rules.ts';
import type { Item, Operation, Property } from './operation.ts';

/** Somebody has changed meanwhile what an operation expected to find. */
export interface Conflict {
	/** Place in the edit's operations. */
	readonly operation: number;
	readonly list?: ItemList;
	readonly id?: string;
	readonly property?: Property;
	readonly field?: string;
	/** What the edit would leave; absent where it would remove. */
	readonly mine?: unknown;
	/** What is there now; absent where it is gone. */
	readonly theirs?: unknown;
	readonly reason: 'changed' | 'gone' | 'taken';
}

export type ApplyResult =
	| { readonly status: 'applied'; readonly floorplan: Floorplan }
	| { readonly status: 'conflict'; readonly conflicts: readonly Conflict[] }
	| { readonly status: 'refused'; readonly problems: readonly Problem[] };

/** A document under change: lists are copied when first written, everything else is shared. */
type Draft = { -readonly [K in keyof Floorplan]: Floorplan[K] };

/**
 * Applies an edit to a document, the same way in the browser and on the server. All or nothing:
 * conflicts name what somebody else changed, problems what the rules of the format refuse. Items
 * that are not touched keep their identity.
 */
export function applyOperations(
	floorplan: Floorplan,
	operations: readonly Operation[]
): ApplyResult {
	const draft: Draft = { ...floorplan };
	const written = new Set<ItemList>();
	const touched = new Map<string, { list: ItemList; id: string }>();
	const properties = new Set<Property>();
	const conflicts: Conflict[] = [];
	const listOf = (list: ItemList): Item[] => {
		if (!written.has(list)) {
			written.add(list);
			Object.assign(draft, { [list]: [...draft[list]] });
		}
		return draft[list] as Item[];
	};
	operations.forEach((operation, index) => {
		if (operation.op === 'set') {
			properties.add(operation.property);
			conflicts.push(...setProperty(draft, operation, index));
			return;
		}
		const id = operation.op === 'change' ? operation.id : operation.item.id;
		if (operation.op !== 'remove')
			touched.set(`${operation.list}:${id}`, { list: operation.list, id });
		conflicts.push(...changeList(listOf(operation.list), operation, index));
	});
	if (conflicts.length > 0) return { status: 'conflict', conflicts };
	const shape = [
		...[...touched.values()].flatMap(({ list, id }) => reparseItem(draft, list, id)),
		...[...properties].flatMap((property) => reparseProperty(draft, property))
	];
	if (shape.length > 0) return { status: 'refused', problems: shape };
	const problems = checkRules(draft);
	return problems.length > 0
		? { status: 'refused', problems }
		: { status: 'applied', floorplan: draft };
}

function setProperty(
	draft: Draft,
	operation: Extract<Operation, { op: 'set' }>,
	index: number
): Conflict[] {
	const { property, from, to } = operation;
	const present = draft[property];
	if (!jsonEquals(present, from)) {
		return [{ operation: index, property, mine: to, theirs: present, reason: 'changed' }];
	}
	Object.assign(draft, { [property]: to });
	if (to === undefined) delete draft[property];
	return [];
}

function changeList(
	items: Item[],
	operation: Exclude<Operation, { op: 'set' }>,
	index: number
): Conflict[] {
	const { list } = operation;
	const id = operation.op === 'change' ? operation.id : operation.item.id;
	const at = items.findIndex((item) => item.id === id);
	const present = at === -1 ? undefined : items[at];
	const where = { operation: index, list, id };
	switch (operation.op) {
		case 'insert':
			if (present) {
				return [{ ...where, mine: operation.item, theirs: present, reason: 'taken' }];
			}
			items.splice(Math.min(operation.index, items.length), 0, operation.item);
			return [];
		case 'remove':
			if (!present) return [{ ...where, reason: 'gone' }];
			if (!jsonEquals(present, operation.item)) {
				return [{ ...where, theirs: present, reason: 'changed' }];
			}
			items.splice(at, 1);
			return [];
		case 'change': {
			const { field, from, to } = operation;
			if (!present) return [{ ...where, field, mine: to, reason: 'gone' }];
			if (!jsonEquals(present[field], from)) {
				return [{ ...where, field, mine: to, theirs: present[field], reason: 'changed' }];
			}
			const { [field]: _replaced, ...rest } = present;
			items[at] = (to === undefined ? rest : { ...present, [field]: to }) as Item;
			return [];
		}
	}
}

/** Checks one item against its schema and puts the parsed form (defaults, grid) in its place. */
function reparseItem(draft: Draft, list: ItemList, id: string): Problem[] {
	const items = draft[list] as Item[];
	const at = items.findIndex((item) => item.id === id);
	if (at === -1) return [];
	const wrapped = floorplanSchema.shape[list];
	const array = wrapped instanceof z.ZodDefault ? wrapped.unwrap() : wrapped;
	const parsed = array.element.safeParse(items[at]);
	if (!parsed.success) {
		return shapeProblems(items[at], parsed.error.issues).map(({ path, message }) => ({
			path: `${itemPath(list, at, id)}${path && '.'}${path}`,
			message
		}));
	}
	items[at] = parsed.data as Item;
	return [];
}

function reparseProperty(draft: Draft, property: Property): Problem[] {
	const parsed = floorplanSchema.shape[property].safeParse(draft[property]);
	if (!parsed.success) {
		return shapeProblems(draft[property], parsed.error.issues).map(({ path, message }) => ({
			path: `${property}${path && '.'}${path}`,
			message
		}));
	}
	if (parsed.data !== undefined) Object.assign(draft, { [property]: parsed.data });
	return [];
}
