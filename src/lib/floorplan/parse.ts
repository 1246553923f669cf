import {
	floorplanSchema,
	ITEM_LISTS,
	itemSchemaOf,
	LIST_LENGTHS,
	type Floorplan
} from './document.ts';
import { findJsonFault } from './json-text.ts';
import { describePath, ownValue, type Problem } from './problems.ts';
import { checkRules, lengthProblem } from './rules.ts';
import { shapeProblems } from './shape-problems.ts';

export type ParseResult =
	| { readonly status: 'parsed'; readonly floorplan: Floorplan }
	| { readonly status: 'refused'; readonly problems: readonly Problem[] };

/** Largest file that is read at all, characters. */
export const MAX_FILE_CHARACTERS = 64 * 1024 * 1024;

/** Problems after which a file with very many items is not looked at any further. */
const MOST_PROBLEMS = 1000;
/** Items of a document from which on they are looked at one by one first. */
const MANY_ITEMS = 5000;

/**
 * A floorplan document from unknown data, or every problem with it (the first thousand or so, in a
 * file of very many items that are wrong).
 */
export function parseFloorplan(data: unknown): ParseResult {
	const barred = [...tooLongLists(data), ...prototypeKeys(data)];
	if (barred.length > 0) return { status: 'refused', problems: barred };
	const many = itemProblems(data);
	if (many.length > 0) return { status: 'refused', problems: many };
	const parsed = floorplanSchema.safeParse(data);
	if (!parsed.success) {
		return { status: 'refused', problems: shapeProblems(data, parsed.error.issues) };
	}
	const problems = checkRules(parsed.data);
	return problems.length > 0
		? { status: 'refused', problems }
		: { status: 'parsed', floorplan: parsed.data };
}

/**
 * A floorplan document from the text of a file. A byte order mark is passed over; faults of the
 * text, keys that stand twice among them, are told with line and column.
 */
export function parseFloorplanText(text: string): ParseResult {
	if (text.length > MAX_FILE_CHARACTERS) {
		return refuse(`file has ${text.length} characters (expected at most ${MAX_FILE_CHARACTERS})`);
	}
	const json = text.startsWith('\uFEFF') ? text.slice(1) : text;
	if (json.trim() === '') return refuse('file is empty (expected a JSON document)');
	const fault = findJsonFault(json);
	if (fault) {
		const { line, column, message } = fault;
		return refuse(`line ${line}, column ${column}: ${message} (expected a JSON document)`);
	}
	return parseFloorplan(JSON.parse(json));
}

function refuse(message: string): ParseResult {
	return { status: 'refused', problems: [{ path: '', message }] };
}

/** Lists over their limit, found before millions of items are looked at one by one. */
function tooLongLists(data: unknown): Problem[] {
	return ITEM_LISTS.flatMap((list) => {
		const items = ownValue(data, list);
		return Array.isArray(items) && items.length > LIST_LENGTHS[list][1]
			? lengthProblem(list, items.length)
			: [];
	});
}

/** Problems of single items of a very large file, so that a hostile one costs neither time nor memory. */
function itemProblems(data: unknown): Problem[] {
	const problems: Problem[] = [];
	const lists = ITEM_LISTS.flatMap((list) => {
		const items = ownValue(data, list);
		return Array.isArray(items) ? [{ list, items: items as readonly unknown[] }] : [];
	});
	if (lists.reduce((sum, { items }) => sum + items.length, 0) < MANY_ITEMS) return [];
	for (const { list, items } of lists) {
		const schema = itemSchemaOf(list);
		for (let index = 0; index < items.length; index++) {
			const parsed = schema.safeParse(items[index]);
			if (parsed.success) continue;
			const issues = parsed.error.issues.map((issue) => ({
				...issue,
				path: [list, index, ...issue.path]
			}));
			problems.push(...shapeProblems(data, issues));
			if (problems.length >= MOST_PROBLEMS) return problems;
		}
	}
	return [];
}

interface Place {
	readonly value: object;
	readonly key: string | number;
	readonly parent: Place | null;
}

/** Keys `__proto__` anywhere: zod passes them over in records, and nothing may be lost silently. */
function prototypeKeys(data: unknown): Problem[] {
	const problems: Problem[] = [];
	const open: Place[] = [];
	const enter = (value: unknown, key: string | number, parent: Place | null) => {
		if (typeof value === 'object' && value !== null) open.push({ value, key, parent });
	};
	enter(data, '', null);
	for (let place = open.pop(); place; place = open.pop()) {
		const { value } = place;
		if (Array.isArray(value)) {
			for (let i = value.length - 1; i >= 0; i--) enter(value[i], i, place);
			continue;
		}
		for (const [key, field] of Object.entries(value)) {
			if (key !== '__proto__') {
				enter(field, key, place);
				continue;
			}
			const keys: PropertyKey[] = [key];
			for (let at: Place = place; at.parent; at = at.parent) keys.unshift(at.key);
			problems.push({
				path: describePath(data, keys),
				message: 'unknown field (expected only the fields of the format)'
			});
		}
	}
	return problems;
}
