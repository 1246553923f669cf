import type { Floorplan } from '#lib/floorplan/index.ts';
import type { ApplyResult, Edit } from '#lib/floorplan/edits/index.ts';
import { backoffMs } from './backoff.ts';
import { EditQueue } from './edit-queue.ts';
import type { ConflictReport, RefusalReport } from './held.ts';
import type { EditStorage, StoredEdit } from './storage.ts';
import type { EditsAnswer, RemoteEdit, Schedule, SubmitAnswer, Transport } from './transport.ts';

export interface SyncState {
	/**
	 * saved: the server has everything. saving: edits are on their way. offline: no answer, edits
	 * wait. conflict: somebody changed the same thing. refused: an edit, or the document as a whole,
	 * cannot be saved. The last two do not stop other edits from being saved.
	 */
	readonly status: 'saved' | 'saving' | 'offline' | 'conflict' | 'refused';
	/** Edits that the server has not confirmed; held ones do not count. */
	readonly pending: number;
	readonly conflicts: readonly ConflictReport[];
	readonly refusals: readonly RefusalReport[];
	/** Why nothing is sent, while offline or stopped. */
	readonly reason: string | null;
	/** Whether only loading the page anew helps; what is not saved is kept for that. */
	readonly mustReload: boolean;
	/** Unconfirmed edits that the storage had no room for: closing the page would lose them. */
	readonly unbuffered: number;
	/** Entries of the storage that could not be read. */
	readonly unreadable: number;
}

export interface SyncChange {
	/** Whether the document is another one than before. */
	readonly document: boolean;
	/** Edits of others that have just arrived. */
	readonly remote: readonly RemoteEdit[];
}

export interface SyncOptions {
	/** The server's document at `version`. */
	readonly document: Floorplan;
	readonly version: number;
	readonly transport: Transport;
	readonly storage: EditStorage;
	readonly schedule: Schedule;
	/** A new uuid. */
	readonly newId: () => string;
	/** The document or the state has changed. */
	readonly onChange: (change: SyncChange) => void;
}

/**
 * Keeps a document and the server in step. Edits take effect at once and are sent one after the
 * other, each exactly once: its id stays the same however often it is sent. What others did
 * meanwhile is put under the edits that are still on their way. One request is open at a time.
 */
export class SyncClient {
	readonly #options: SyncOptions;
	readonly #queue: EditQueue;
	/** Edits from the storage of which it is not known yet whether the server has them. */
	#unverified: readonly StoredEdit[];
	/** Those of them that do not apply to the document as it is. */
	#parked: readonly Edit[];
	readonly #unreadable: number;
	readonly #unbuffered = new Set<string>();
	/** Place of the next edit in the order of the storage. */
	#order: number;
	/** The newest version heard of. */
	#target: number;
	#mustFetch = false;
	/** Edit that the server found in conflict, and the version at which it was sent. */
	#rejected: { readonly id: string; readonly version: number } | null = null;
	#isBusy = false;
	#attempts = 0;
	#offlineReason: string | null = null;
	#cancelRetry: (() => void) | null = null;
	#stopped: { readonly reason: string; readonly isFinal: boolean } | null = null;
	#isDisposed = false;
	/** The document that `onChange` last spoke of. */
	#announced: Floorplan;

	constructor(options: SyncOptions) {
		this.#options = options;
		this.#target = options.version;
		this.#announced = options.document;
		const { edits, unreadable } = options.storage.load();
		this.#unverified = edits;
		this.#unreadable = unreadable;
		this.#order = 1 + Math.max(0, ...edits.map(({ order }) => order));
		this.#queue = new EditQueue({
			document: options.document,
			version: options.version,
			newId: options.newId,
			onAdded: (edit) => this.#buffer(edit),
			onDone: (id) => this.#forget(id)
		});
		this.#parked = this.#queue.restore(edits.map(({ edit }) => edit));
		void this.#drain();
	}

	/** The document as the person sees it: the server's, with the edits on their way. */
	get document(): Floorplan {
		return this.#queue.document;
	}

	/** The server's version that the document builds on. */
	get version(): number {
		return this.#queue.version;
	}

	get state(): SyncState {
		const { conflicts, refusals } = this.#queue;
		const pending = this.#queue.pending.length + this.#parked.length;
		const busy = pending > 0 ? 'saving' : 'saved';
		const reachable = this.#offlineReason === null ? busy : 'offline';
		const decided = conflicts.length > 0 ? 'conflict' : reachable;
		return {
			status: this.#stopped || refusals.length > 0 ? 'refused' : decided,
			pending,
			conflicts,
			refusals,
			reason: this.#stopped?.reason ?? this.#offlineReason,
			mustReload: this.#stopped?.isFinal ?? false,
			unbuffered: this.#unbuffered.size,
			unreadable: this.#unreadable
		};
	}

	/**
	 * Applies an edit and sends it. An edit that does not apply changes nothing, and the answer says
	 * why: an undo of what somebody else has changed since is a conflict like any other.
	 */
	submit(edit: Edit): ApplyResult {
		const result = this.#queue.submit(edit);
		if (result.status === 'applied') {
			this.#changed();
			void this.#drain();
		}
		return result;
	}

	/** Decides a conflict; see EditQueue. */
	resolve(conflictId: string, choice: 'mine' | 'theirs'): ApplyResult | null {
		const result = this.#queue.resolve(conflictId, choice);
		this.#changed();
		void this.#drain();
		return result;
	}

	/** Gives up a refused edit. */
	dismiss(refusalId: string): void {
		this.#queue.dismiss(refusalId);
		this.#changed();
	}

	/** Somebody's edit, perhaps our own, made this version of the server's document. */
	remoteChanged(version: number): void {
		this.#target = Math.max(this.#target, version);
		void this.#drain();
	}

	/** Asks the server for edits although none was announced, such as after a gap in the events. */
	refresh(): void {
		this.#mustFetch = true;
		this.retryNow();
	}

	/** Tries again at once, such as when the browser is back online or the person signed in again. */
	retryNow(): void {
		if (this.#stopped && !this.#stopped.isFinal) this.#stopped = null;
		this.#cancelRetry?.();
		this.#cancelRetry = null;
		this.#attempts = 0;
		void this.#drain();
	}

	/** Stops sending; what waits stays in the storage. */
	dispose(): void {
		this.#isDisposed = true;
		this.#cancelRetry?.();
	}

	#buffer(edit: Edit): void {
		const stored = { edit, baseVersion: this.#queue.version, order: this.#order++ };
		if (!this.#options.storage.put(stored)) this.#unbuffered.add(edit.id);
	}

	#forget(id: string): void {
		this.#options.storage.remove(id);
		this.#unbuffered.delete(id);
	}

	#changed(remote: readonly RemoteEdit[] = []): void {
		if (this.#isDisposed) return;
		const isOther = this.document !== this.#announced;
		this.#announced = this.document;
		this.#options.onChange({ document: isOther, remote });
	}

	/** Fetches and sends, one request at a time, until nothing is left or can be done now. */
	async #drain(): Promise<void> {
		if (this.#isBusy) return;
		this.#isBusy = true;
		try {
			// Not within the call that made the work: the caller first sees its own answer.
			await Promise.resolve();
			while (!this.#isDisposed && !this.#stopped && !this.#cancelRetry) {
				if (this.#mustFetch || this.#target > this.version || this.#unverified.length > 0) {
					await this.#fetch();
				} else if (this.#queue.pending.length > 0) {
					await this.#sendFirst();
				} else {
					break;
				}
			}
		} finally {
			this.#isBusy = false;
		}
	}

	async #sendFirst(): Promise<void> {
		const [edit] = this.#queue.pending;
		const baseVersion = this.version;
		const answer: SubmitAnswer = await settled(() =>
			this.#options.transport.submit({ ...edit, baseVersion })
		);
		if (this.#isDisposed) return;
		if (answer.status === 'unreachable') {
			this.#backOff(answer.reason);
			return;
		}
		this.#answered();
		if (answer.status === 'conflict') {
			this.#rejected = { id: edit.id, version: this.version };
			this.#mustFetch = true;
		} else if (answer.status === 'refused') {
			this.#queue.refuseFirst(answer.reason, answer.problems);
		} else if (answer.version <= this.version) {
			this.#queue.dropFirst();
		} else if (answer.version > this.version + 1) {
			// Others came first: the edit is taken off the queue where it comes up among theirs.
			this.#target = Math.max(this.#target, answer.version);
			return;
		} else if (this.#queue.confirmFirst() === 'disagreement') {
			this.#disagree();
		}
		this.#changed();
	}

	async #fetch(): Promise<void> {
		const before = this.version;
		let after = Math.min(before, ...this.#unverified.map(({ baseVersion }) => baseVersion));
		const remote: RemoteEdit[] = [];
		let isMoved = false;
		let answer: EditsAnswer;
		do {
			const from = after;
			answer = await settled(() => this.#options.transport.editsAfter(from));
			if (this.#isDisposed) return;
			if (answer.status !== 'edits') break;
			this.#answered();
			for (const edit of answer.edits) {
				isMoved = this.#take(edit, remote) || isMoved;
				if (this.#stopped) return;
				after = edit.version;
			}
		} while (answer.hasMore && answer.edits.length > 0);
		if (isMoved) this.#queue.replay();
		if (answer.status === 'unreachable') this.#backOff(answer.reason);
		else if (answer.status === 'refused') this.#stop(answer.reason, false);
		else this.#fetched(before);
		this.#changed(remote);
	}

	/** After the last page of edits. */
	#fetched(before: number): void {
		this.#mustFetch = false;
		if (this.#target > this.version && this.version === before) {
			this.#backOff('The server is still catching up.');
			return;
		}
		this.#unverified = [];
		this.#queue.adopt(this.#parked);
		this.#parked = [];
		const rejected = this.#rejected;
		this.#rejected = null;
		if (rejected?.id === this.#queue.pending[0]?.id && rejected?.version === this.version) {
			const reason = 'The server finds a conflict that this page does not see. Reload the page.';
			this.#queue.refuseFirst(reason, []);
		}
	}

	/** Takes in one edit of the server's log; true where the document has to be built anew. */
	#take(edit: RemoteEdit, remote: RemoteEdit[]): boolean {
		const isOurs = this.#unverified.some((stored) => stored.edit.id === edit.id);
		if (isOurs) {
			this.#unverified = this.#unverified.filter((stored) => stored.edit.id !== edit.id);
			this.#parked = this.#parked.filter(({ id }) => id !== edit.id);
			this.#forget(edit.id);
		}
		const taken = this.#queue.take(edit);
		if (taken === 'gap' || taken === 'disagreement') this.#disagree();
		else if (taken === 'theirs' && !isOurs) remote.push(edit);
		return taken !== 'known';
	}

	#answered(): void {
		this.#attempts = 0;
		this.#offlineReason = null;
	}

	#backOff(reason: string): void {
		this.#attempts++;
		this.#offlineReason = reason;
		const seed = this.#queue.pending[0]?.id ?? reason;
		this.#cancelRetry = this.#options.schedule(backoffMs(this.#attempts, seed), () => {
			this.#cancelRetry = null;
			void this.#drain();
		});
		this.#changed();
	}

	#disagree(): void {
		const reason =
			'This page no longer agrees with the server. Reload it; unsaved changes are kept for that.';
		this.#stop(reason, true);
	}

	#stop(reason: string, isFinal: boolean): void {
		this.#stopped ??= { reason, isFinal };
		this.#changed();
	}
}

/** A rejected promise is a request without an answer. */
async function settled<T>(
	request: () => Promise<T>
): Promise<T | { status: 'unreachable'; reason: string }> {
	try {
		return await request();
	} catch (error) {
		const reason =
			error instanceof Error && error.message !== '' ? error.message : 'No connection.';
		return { status: 'unreachable', reason };
	}
}
