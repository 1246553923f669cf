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
