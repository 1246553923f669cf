import { sha256 } from '@noble/hashes/sha2.js';
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js';
import type { Floorplan } from './document.ts';

/** JSON with sorted keys and no white space: equal values give equal text. */
export function canonicalJson(value: unknown): string {
	if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`;
	if (typeof value === 'object' && value !== null) {
		const fields = Object.entries(value)
			.filter(([, field]) => field !== undefined)
			.sort(([a], [b]) => (a < b ? -1 : 1))
			.map(([key, field]) => `${JSON.stringify(key)}:${canonicalJson(field)}`);
		return `{${fields.join(',')}}`;
	}
	return JSON.stringify(value === 0 ? 0 : value);
}

/** Whether two JSON values are equal, whatever the order of their keys. */
export function jsonEquals(a: unknown, b: unknown): boolean {
	if (a === b) return true;
	if (typeof a !== 'object' || typeof b !== 'object' || a === null || b === null) return false;
	return canonicalJson(a) === canonicalJson(b);
}

/** SHA-256 of the canonical JSON of a parsed document, hexadecimal: the identity of its content. */
export function hashFloorplan(floorplan: Floorplan): string {
	return bytesToHex(sha256(utf8ToBytes(canonicalJson(floorplan))));
}

/** The document as the text of a file for people; parsing it gives the same hash. */
export function writeFloorplan(floorplan: Floorplan): string {
	return `${JSON.stringify(floorplan, null, '\t')}\n`;
}

/** How deep values of a document or an edit may be nested; the format itself needs 7. */
export const MAX_NESTING = 16;

/**
 * Whether a value is JSON that is safe to walk recursively: finite numbers, no key `__proto__`,
 * nested at most MAX_NESTING deep. Checked without recursion, so that hostile nesting cannot
 * exhaust the stack.
 */
export function isPlainJson(value: unknown): boolean {
	const open: { value: unknown; depth: number }[] = [{ value, depth: 0 }];
	for (let next = open.pop(); next; next = open.pop()) {
		const { value: one, depth } = next;
		if (typeof one === 'number') {
			if (!Number.isFinite(one)) return false;
		} else if (typeof one === 'object' && one !== null) {
			if (depth >= MAX_NESTING || Object.hasOwn(one, '__proto__')) return false;
			for (const field of Object.values(one)) open.push({ value: field, depth: depth + 1 });
		} else if (one !== null && typeof one !== 'string' && typeof one !== 'boolean') {
			return false;
		}
	}
	return true;
}
