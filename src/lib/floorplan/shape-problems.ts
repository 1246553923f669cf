import type { z } from 'zod';
import { describePath, ownValue, type Problem } from './problems.ts';

/** Zod's issues as problems; an unknown field is named by its own path. */
export function shapeProblems(data: unknown, issues: readonly z.core.$ZodIssue[]): Problem[] {
	return issues.flatMap((issue): Problem[] => {
		if (issue.code === 'unrecognized_keys') {
			return issue.keys.map((key) => ({
				path: describePath(data, [...issue.path, key]),
				message: 'unknown field (expected only the fields of the format)'
			}));
		}
		if (issue.code === 'invalid_key') {
			const path = describePath(data, issue.path);
			return [{ path, message: `not an id (${issue.issues[0]?.message ?? issue.message})` }];
		}
		const path = describePath(data, issue.path);
		return [{ path, message: describeIssue(issue, valueAt(data, issue.path)) }];
	});
}

function valueAt(data: unknown, keys: readonly PropertyKey[]): unknown {
	return keys.reduce<unknown>(ownValue, data);
}

/** The value as people know it from the file, short whatever it holds. */
function show(value: unknown): string {
	if (value === undefined) return 'missing';
	if (typeof value === 'string') {
		return JSON.stringify(value.length > 40 ? `${value.slice(0, 37)}...` : value);
	}
	if (Array.isArray(value)) return value.length === 1 ? 'list of 1' : `list of ${value.length}`;
	return typeof value === 'object' && value !== null ? 'object' : String(value);
}

/** What a type is called in a file. */
function nameOf(expected: string): string {
	const names: Record<string, string> = {
		number: 'a finite number',
		int: 'a whole number',
		string: 'a text',
		boolean: 'true or false',
		array: 'a list',
		tuple: 'a list',
		object: 'an object',
		record: 'an object'
	};
	return Object.hasOwn(names, expected) ? names[expected] : expected;
}

function describeIssue(issue: z.core.$ZodIssue, value: unknown): string {
	switch (issue.code) {
		case 'invalid_type':
			return `${show(value)} (expected ${nameOf(issue.expected)})`;
		case 'invalid_value':
			return `${show(value)} (expected ${issue.values.map((one) => JSON.stringify(one)).join(' or ')})`;
		case 'too_small': {
			const least = `${issue.inclusive ? 'at least' : 'more than'} ${issue.minimum}`;
			return `${show(value)} is too ${sizeWords(issue.origin).short} (expected ${least}${sizeWords(issue.origin).unit})`;
		}
		case 'too_big': {
			const most = `${issue.inclusive ? 'at most' : 'less than'} ${issue.maximum}`;
			return `${show(value)} is too ${sizeWords(issue.origin).long} (expected ${most}${sizeWords(issue.origin).unit})`;
		}
		case 'invalid_union':
			return `${show(value)} fits none of the forms (${unionHints(issue)})`;
		default:
			return `${show(value)} (${issue.message})`;
	}
}

function sizeWords(origin: string): { short: string; long: string; unit: string } {
	if (origin === 'array') return { short: 'short', long: 'long', unit: ' items' };
	if (origin === 'string') return { short: 'short', long: 'long', unit: ' characters' };
	return { short: 'small', long: 'large', unit: '' };
}

/** The first thing wrong with each form of a union. */
function unionHints(issue: z.core.$ZodIssueInvalidUnion): string {
	return issue.errors
		.flatMap(([first]) => {
			if (!first) return [];
			const where = first.path.length > 0 ? `${first.path.join('.')}: ` : '';
			return [
				`${where}${first.code === 'invalid_value' ? `expected ${first.values.map((one) => JSON.stringify(one)).join(' or ')}` : first.message}`
			];
		})
		.join('; or ');
}
