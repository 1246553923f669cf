import { z } from 'zod';
import { editSchema } from '#lib/floorplan/edits/index.ts';

const storedEditSchema = z.strictObject({
	edit: editSchema,
	/** Version of the server's document when the edit was made. */
	baseVersion: z.int().nonnegative(),
	/** Place in the order in which edits were made. */
	order: z.int().nonnegative()
});

/** An edit that the server has not confirmed yet. */
export type StoredEdit = z.infer<typeof storedEditSchema>;

/**
 * Where edits wait for the server, so that they survive the closing of the tab. Only a buffer:
 * when it fails, edits are still sent from memory.
 */
export interface EditStorage {
	/** Everything kept, in the order in which it was made; `unreadable` counts what is none of ours. */
	load(): { edits: StoredEdit[]; unreadable: number };
	/** False where there is no room. */
	put(edit: StoredEdit): boolean;
	remove(id: string): void;
}

/** The part of the browser's storage that is used; its methods may throw. */
export interface StringStore {
	readonly length: number;
	key(index: number): string | null;
	getItem(key: string): string | null;
	setItem(key: string, value: string): void;
	removeItem(key: string): void;
}

/**
 * Keeps each edit under a key of its own, tied to user and floorplan: two tabs do not overwrite
 * each other, and another person on the same machine does not send what is not theirs. A second
 * tab may pick up what the first is still sending; the edit ids make that harmless.
 */
export function createEditStorage(
	store: StringStore,
	userId: string,
	floorplanId: string
): EditStorage {
	const prefix = `manyweir.edit.${userId}.${floorplanId}.`;
	return {
		load() {
			const edits: StoredEdit[] = [];
			let unreadable = 0;
			for (const text of readAll(store, prefix)) {
				const stored = storedEditSchema.safeParse(parseJson(text));
				if (stored.success) edits.push(stored.data);
				else unreadable++;
			}
			return { edits: edits.sort((a, b) => a.order - b.order), unreadable };
		},
		put(stored) {
			try {
				store.setItem(prefix + stored.edit.id, JSON.stringify(stored));
				return true;
			} catch {
				// Full, or switched off by the person: the caller says so.
				return false;
			}
		},
		remove(id) {
			try {
				store.removeItem(prefix + id);
			} catch {
				// A store that cannot be written is not read either; the server knows the id anyway.
			}
		}
	};
}

function readAll(store: StringStore, prefix: string): string[] {
	try {
		return Array.from({ length: store.length }, (_, index) => store.key(index)).flatMap((key) => {
			const text = key?.startsWith(prefix) ? store.getItem(key) : null;
			return text === null ? [] : [text];
		});
	} catch {
		return [];
	}
}

function parseJson(text: string): unknown {
	try {
		return JSON.parse(text);
	} catch {
		return undefined;
	}
}
