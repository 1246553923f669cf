import type { z } from 'zod';
import { floorplanSchema, type Floorplan } from './document.ts';
import { describePath, type Problem } from './problems.ts';
import { checkRules } from './rules.ts';

export type ParseResult =
	| { readonly status: 'parsed'; readonly floorplan: Floorplan }
	| { readonly status: 'refused'; readonly problems: readonly Problem[] };

/** Largest file that is read at all, characters. */
export const MAX_FILE_CHARACTERS = 64 * 1024 * 1024;

/** A floorplan document from unknown data, or every problem with it. */
export function parseFloorplan(data: unknown): ParseResult {
	const parsed = floorplanSchema.safeParse(data);
	if (!parsed.success)
		return { status: 'refused', problems: shapeProblems(data, parsed.error.issues) };
	const problems = checkRules(parsed.data);
	return problems.length > 0
		? { status: 'refused', problems }
		: { status: 'parsed', floorplan: parsed.data };
}

/** A floorplan document from the text of a file: a byte order mark is passed over. */
export function parseFloorplanText(text: string): ParseResult {
	if (text.length > MAX_FILE_CHARACTERS) {
		return refuse(`file has ${text.length} characters (expected at most ${MAX_FILE_CHARACTERS})`);
	}
	const json = text.startsWith('\uFEFF') ? text.slice(1) : text;
	let data: unknown;
	try {
		data = JSON.parse(json);
	} catch (error) {
		return refuse(`${syntaxMessage(json, error)} (expected a JSON document)`);
	}
	return parseFloorplan(data);
}

function refuse(message: string): ParseResult {
	return { status: 'refused', problems: [{ path: '', message }] };
}

/** What JSON.parse says, with line and column where it tells a position. */
function syntaxMessage(text: string, error: unknown): string {
	const said = error instanceof Error ? error.message : String(error);
	const position = /position (\d+)/.exec(said);
	if (!position) return said;
	const before = text.slice(0, Number(position[1])).split('\n');
	return `not JSON at line ${before.length}, column ${before[before.length - 1].length + 1}`;
}

/** Zod's issues as problems; an unknown field is named by its own path. */
export function shapeProblems(data: unknown, issues: readonly z.core.$ZodIssue[]): Problem[] {
	return issues.flatMap((issue): Problem[] => {
		if (issue.code === 'unrecognized_keys') {
			return issue.keys.map((key) => ({
				path: describePath(data, [...issue.path, key]),
				message: 'unknown field (expected only the fields of the format)'
			}));
		}
		const path = describePath(data, issue.path);
		return [{ path, message: describeIssue(issue, valueAt(data, issue.path)) }];
	});
}

function valueAt(data: unknown, keys: readonly PropertyKey[]): unknown {
	return keys.reduce<unknown>(
		(value, key) =>
			typeof value === 'object' && value !== null ? Reflect.get(value, key) : undefined,
		data
	);
}

/** The value as it would stand in the file, shortened. */
function show(value: unknown): string {
	if (value === undefined) return 'missing';
	if (typeof value === 'number') return String(value);
	const text = JSON.stringify(value) ?? String(value);
	return text.length > 40 ? `${text.slice(0, 37)}...` : text;
}

function describeIssue(issue: z.core.$ZodIssue, value: unknown): string {
	switch (issue.code) {
		case 'invalid_type':
			return value === undefined
				? `missing (expected ${issue.expected})`
				: `${show(value)} (expected ${issue.expected === 'number' ? 'a finite number' : issue.expected})`;
		case 'invalid_value':
			return `${show(value)} (expected ${issue.values.map((one) => JSON.stringify(one)).join(' or ')})`;
		case 'too_small':
			return `${show(value)} is too ${issue.origin === 'array' ? 'short' : 'small'} (expected ${issue.inclusive ? 'at least' : 'more than'} ${issue.minimum}${issue.origin === 'array' ? ' items' : ''})`;
		case 'too_big':
			return `${show(value)} is too ${issue.origin === 'array' ? 'long' : 'large'} (expected ${issue.inclusive ? 'at most' : 'less than'} ${issue.maximum}${issue.origin === 'array' ? ' items' : ''})`;
		default:
			return `${show(value)} (${issue.message})`;
	}
}
