import type { Problem } from '#lib/floorplan/index.ts';
import type { Edit } from '#lib/floorplan/edits/index.ts';

/** An edit as the server keeps it: the document's versions count them without gaps. */
export interface RemoteEdit extends Edit {
	/** Version of the document after this edit. */
	readonly version: number;
	/** Who made it, as shown to people. */
	readonly by: string;
	/** When the server took it, ISO 8601. */
	readonly at: string;
}

export interface OutgoingEdit extends Edit {
	/** Version of the server's document that the sender had seen. */
	readonly baseVersion: number;
}

/** No answer, or none that says whether the request took effect: the same request is sent again. */
export interface Unreachable {
	readonly status: 'unreachable';
	/** For people: "no connection", "sign in again". */
	readonly reason: string;
}

export type SubmitAnswer =
	| { readonly status: 'accepted'; readonly version: number }
	/** Somebody has changed the same thing: what it was is in the edits since. */
	| { readonly status: 'conflict' }
	/** The server will never take this edit: a rule of the format, a missing permission. */
	| {
			readonly status: 'refused';
			readonly reason: string;
			readonly problems: readonly Problem[];
	  }
	| Unreachable;

export type EditsAnswer =
	| { readonly status: 'edits'; readonly edits: readonly RemoteEdit[]; readonly hasMore: boolean }
	/** The document cannot be read any more: deleted, or no longer shared. */
	| { readonly status: 'refused'; readonly reason: string }
	| Unreachable;

/**
 * The way to the server. Every promise must settle (with a time limit of its own) and should not
 * reject; a rejection counts as unreachable. The server takes an edit id once: the same id again
 * is answered as it was the first time.
 */
export interface Transport {
	submit(edit: OutgoingEdit): Promise<SubmitAnswer>;
	/** Edits with versions greater than the given one, ascending, without gaps. */
	editsAfter(version: number): Promise<EditsAnswer>;
}

/** Calls back after a delay, ms; the returned function calls it off. */
export type Schedule = (delayMs: number, callback: () => void) => () => void;
