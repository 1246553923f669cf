import type { z } from 'zod';
import { jsonEquals } from '../canonical.ts';
import { floorplanSchema, itemSchemaOf, type Floorplan, type ItemList } from '../document.ts';
import { itemPath, type Problem } from '../problems.ts';
import { checkListLengths, checkRules } from '../rules.ts';
import { shapeProblems } from '../shape-problems.ts';
import { findItem, type ItemReference } from './actions.ts';
import { ItemTable } from './item-table.ts';
import type { Item, Operation, Property } from './operation.ts';
import { referenceProblems } from './references.ts';

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
	| {
			readonly status: 'applied';
			readonly floorplan: Floorplan;
			/** Operations that lead back; their `from` values are what really stands in the document. */
			readonly inverse: Operation[];
	  }
	| { readonly status: 'conflict'; readonly conflicts: readonly Conflict[] }
	| { readonly status: 'refused'; readonly problems: readonly Problem[] };

/** A document under change: lists are copied when first written, everything else is shared. */
type Draft = { -readonly [K in keyof Floorplan]: Floorplan[K] };

/** What one operation did: its inverse, or what stands against it. */
type Step =
	| { readonly inverse: Operation; readonly problems: readonly Problem[] }
	| { readonly conflict: Omit<Conflict, 'operation'> };

/**
 * Applies an edit to a document, the same way in the browser and on the server. All or nothing:
 * conflicts name what somebody else changed, problems what the rules of the format refuse. Items
 * that are not touched keep their identity. Values are brought to the form that parsing a document
 * gives them (defaults, nanometre grid) as they are written.
 */
export function applyOperations(
	floorplan: Floorplan,
	operations: readonly Operation[]
): ApplyResult {
	const draft: Draft = { ...floorplan };
	const tables = new Map<ItemList, ItemTable>();
	const conflicts: Conflict[] = [];
	const problems: Problem[] = [];
	const inverse: Operation[] = [];
	operations.forEach((operation, index) => {
		const step =
			operation.op === 'set'
				? setProperty(draft, operation)
				: changeList(tableOf(draft, tables, operation.list), operation);
		if ('conflict' in step) {
			conflicts.push({ operation: index, ...step.conflict });
		} else {
			problems.push(...step.problems);
			inverse.push(step.inverse);
		}
	});
	if (conflicts.length > 0) return { status: 'conflict', conflicts };
	if (problems.length === 0)
		problems.push(...referenceProblems(draft, removedItems(draft, operations)));
	if (problems.length === 0) problems.push(...checkListLengths(draft), ...checkRules(draft));
	return problems.length > 0
		? { status: 'refused', problems }
		: { status: 'applied', floorplan: draft, inverse: inverse.reverse() };
}

/** Items that operations removed and did not put back. */
function removedItems(draft: Draft, operations: readonly Operation[]): ItemReference[] {
	return operations.flatMap((operation): ItemReference[] => {
		if (operation.op !== 'remove') return [];
		const { list, item } = operation;
		return findItem(draft, list, item.id) ? [] : [{ list, id: item.id }];
	});
}

function tableOf(draft: Draft, tables: Map<ItemList, ItemTable>, list: ItemList): ItemTable {
	let table = tables.get(list);
	if (!table) {
		table = new ItemTable(draft[list] as readonly Item[]);
		tables.set(list, table);
		Object.assign(draft, { [list]: table.items });
	}
	return table;
}

/** A value in the form of its schema; as it came, with problems, where it does not fit. */
function normalise(
	schema: z.ZodType,
	value: unknown,
	path: string
): { value: unknown; problems: Problem[] } {
	const parsed = schema.safeParse(value);
	if (parsed.success) return { value: parsed.data, problems: [] };
	const problems = shapeProblems(value, parsed.error.issues).map((problem) => ({
		path: `${path}${problem.path === '' || problem.path.startsWith('[') ? '' : '.'}${problem.path}`,
		message: problem.message
	}));
	return { value, problems };
}

function setProperty(draft: Draft, operation: Extract<Operation, { op: 'set' }>): Step {
	const { property, from, to } = operation;
	const present = draft[property];
	if (!jsonEquals(present, from)) {
		return { conflict: { property, mine: to, theirs: present, reason: 'changed' } };
	}
	const { value, problems } = normalise(floorplanSchema.shape[property], to, property);
	if (value === undefined) delete draft[property];
	else Object.assign(draft, { [property]: value });
	return { inverse: { op: 'set', property, from: value, to: present }, problems };
}

function changeList(table: ItemTable, operation: Exclude<Operation, { op: 'set' }>): Step {
	const { list } = operation;
	const id = operation.op === 'change' ? operation.id : operation.item.id;
	const at = table.indexOf(id);
	const present = at === -1 ? undefined : table.items[at];
	switch (operation.op) {
		case 'insert': {
			if (present) {
				return {
					conflict: { list, id, mine: operation.item, theirs: present, reason: 'taken' }
				};
			}
			const index = Math.min(operation.index, table.items.length);
			const parsed = normalise(itemSchemaOf(list), operation.item, itemPath(list, index, id));
			const item = parsed.value as Item;
			table.insert(index, item);
			return { inverse: { op: 'remove', list, index, item }, problems: parsed.problems };
		}
		case 'remove':
			if (!present) return { conflict: { list, id, reason: 'gone' } };
			if (!jsonEquals(present, operation.item)) {
				return { conflict: { list, id, theirs: present, reason: 'changed' } };
			}
			table.remove(at);
			return { inverse: { op: 'insert', list, index: at, item: present }, problems: [] };
		case 'change':
			return changeField(table, operation, at);
	}
}

function changeField(
	table: ItemTable,
	{ list, id, field, from, to }: Extract<Operation, { op: 'change' }>,
	at: number
): Step {
	if (at === -1) return { conflict: { list, id, field, mine: to, reason: 'gone' } };
	const item = table.items[at];
	const present = Object.hasOwn(item, field) ? item[field] : undefined;
	if (!jsonEquals(present, from)) {
		return { conflict: { list, id, field, mine: to, theirs: present, reason: 'changed' } };
	}
	const path = `${itemPath(list, at, id)}.${field}`;
	const { shape } = itemSchemaOf(list);
	const inverse: Operation = { op: 'change', list, id, field, from: to, to: present };
	if (field === 'id') {
		const message = 'an id does not change (expected to remove the item and insert another)';
		return { inverse, problems: [{ path, message }] };
	}
	if (!Object.hasOwn(shape, field)) {
		const message = 'unknown field (expected only the fields of the format)';
		return { inverse, problems: [{ path, message }] };
	}
	const { value, problems } = normalise(shape[field] as z.ZodType, to, path);
	const { [field]: _replaced, ...rest } = item;
	table.replace(at, value === undefined ? { ...rest, id } : { ...item, [field]: value });
	return { inverse: { ...inverse, from: value }, problems };
}
