/** Something wrong with a document: where, what, and what would be right. */
export interface Problem {
	/** Path that names ids, not indices alone: `regulators[3] (R_0_3).xUm`; empty for the whole. */
	readonly path: string;
	/** What is wrong, and in brackets what is expected. */
	readonly message: string;
}

/** How many problems are printed before the rest is only counted. */
const MOST_PRINTED = 20;

/** One line per problem, at most `most` of them and a count of the rest. */
export function formatProblems(problems: readonly Problem[], most = MOST_PRINTED): string[] {
	const lines = problems
		.slice(0, most)
		.map(({ path, message }) => `${path || 'document'}: ${message}`);
	const rest = problems.length - lines.length;
	return rest > 0 ? [...lines, `and ${rest} more`] : lines;
}

/** Path of an item of a list, with its id. */
export function itemPath(list: string, index: number, id: string): string {
	return `${list}[${index}] (${id})`;
}

/** A field of an unknown value, never one that it inherits. */
export function ownValue(value: unknown, key: PropertyKey): unknown {
	return typeof value === 'object' && value !== null && Object.hasOwn(value, key)
		? Reflect.get(value, key)
		: undefined;
}

/** A path of keys as text; the id of each list item that has one stands beside its index. */
export function describePath(root: unknown, keys: readonly PropertyKey[]): string {
	let text = '';
	let value: unknown = root;
	for (const key of keys) {
		value = ownValue(value, key);
		if (typeof key === 'number') {
			const id = ownValue(value, 'id');
			text += `[${key}]`;
			if (typeof id === 'string' && id !== '' && id.length <= 64) text += ` (${id})`;
		} else {
			text += text === '' ? String(key) : `.${String(key)}`;
		}
	}
	return text;
}
