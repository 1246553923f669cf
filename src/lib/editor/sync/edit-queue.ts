import type { Floorplan, Problem } from '#lib/floorplan/index.ts';
import { applyOperations, type ApplyResult, type Edit } from '#lib/floorplan/edits/index.ts';
import {
	buildsOn,
	conflictsOf,
	mineOperations,
	reportConflict,
	theirsOperations,
	type ConflictReport,
	type Held,
	type RefusalReport
} from './held.ts';
import { History } from './history.ts';
import type { RemoteEdit } from './transport.ts';

export interface EditQueueOptions {
	/** The server's document at `version`. */
	readonly document: Floorplan;
	readonly version: number;
	/** A new uuid. */
	readonly newId: () => string;
	/** An edit came in that the server has to confirm. */
	readonly onAdded: (edit: Edit) => void;
	/** An edit is confirmed or given up. */
	readonly onDone: (id: string) => void;
}

const MISFIT = 'The change does not fit the document any more.';

/**
 * The document under edits that the server has not confirmed. Always holds: `document` is the
 * server's document at `version` with the pending edits applied in order; every edit that came in
 * is confirmed, pending, or held for a decision. Knows nothing of requests and time.
 */
export class EditQueue {
	readonly #options: EditQueueOptions;
	readonly #history = new History();
	#confirmed: Floorplan;
	#version: number;
	#document: Floorplan;
	#pending: readonly Edit[] = [];
	#held: readonly Held[] = [];

	constructor(options: EditQueueOptions) {
		this.#options = options;
		this.#confirmed = options.document;
		this.#document = options.document;
		this.#version = options.version;
	}

	/** The document as the person sees it. */
	get document(): Floorplan {
		return this.#document;
	}

	get version(): number {
		return this.#version;
	}

	/** Edits that wait for the server, in order. */
	get pending(): readonly Edit[] {
		return this.#pending;
	}

	get conflicts(): ConflictReport[] {
		return this.#held.flatMap((held) =>
			held.refusal
				? []
				: [reportConflict(held, conflictsOf(held, this.#document), this.#history.authors)]
		);
	}

	get refusals(): RefusalReport[] {
		return this.#held.flatMap(({ id, edits, refusal }) =>
			refusal
				? [{ id, label: edits[0].label, edits: edits.map((edit) => edit.id), ...refusal }]
				: []
		);
	}

	/** Applies an edit and puts it at the end of the queue; one that does not apply changes nothing. */
	submit(edit: Edit): ApplyResult {
		const result = applyOperations(this.#document, edit.operations);
		if (result.status !== 'applied' || edit.operations.length === 0) return result;
		this.#document = result.floorplan;
		this.#pending = [...this.#pending, edit];
		this.#options.onAdded(edit);
		this.#settle();
		return result;
	}

	/**
	 * Takes edits of an earlier visit into the queue where they apply; gives back the others. Those
	 * may stand in conflict, or be in the document already: the server's log has to tell.
	 */
	restore(edits: readonly Edit[]): Edit[] {
		const others: Edit[] = [];
		for (const edit of edits) {
			const result = applyOperations(this.#document, edit.operations);
			if (result.status === 'applied') {
				this.#document = result.floorplan;
				this.#pending = [...this.#pending, edit];
			} else {
				others.push(edit);
			}
		}
		return others;
	}

	/** Puts edits of an earlier visit that the server does not have at the end of the queue. */
	adopt(edits: readonly Edit[]): void {
		if (edits.length === 0) return;
		this.#pending = [...this.#pending, ...edits];
		this.replay();
	}

	/**
	 * Takes in one edit of the server's log. Pending edits are put on top of it by `replay`, to be
	 * called after the last one. Gap and disagreement mean that the document must be loaded anew.
	 */
	take(edit: RemoteEdit): 'known' | 'ours' | 'theirs' | 'gap' | 'disagreement' {
		if (edit.version <= this.#version) return this.#drop(edit.id) ? 'ours' : 'known';
		if (edit.version !== this.#version + 1) return 'gap';
		const result = applyOperations(this.#confirmed, edit.operations);
		if (result.status !== 'applied') return 'disagreement';
		this.#confirmed = result.floorplan;
		this.#version = edit.version;
		if (this.#drop(edit.id)) return 'ours';
		this.#history.record(edit);
		return 'theirs';
	}

	/** The server has taken the first pending edit as the version after ours. */
	confirmFirst(): 'ours' | 'disagreement' {
		const [edit, ...rest] = this.#pending;
		if (rest.length === 0) {
			// With nothing behind it, the document that the person sees is the server's.
			this.#confirmed = this.#document;
		} else {
			const result = applyOperations(this.#confirmed, edit.operations);
			if (result.status !== 'applied') return 'disagreement';
			this.#confirmed = result.floorplan;
		}
		this.#version++;
		this.#pending = rest;
		this.#options.onDone(edit.id);
		return 'ours';
	}

	/** The server had the first pending edit before the version that we hold. */
	dropFirst(): void {
		this.#drop(this.#pending[0].id);
		this.replay();
	}

	/** The server will not take the first pending edit. */
	refuseFirst(reason: string, problems: readonly Problem[]): void {
		const [edit, ...rest] = this.#pending;
		this.#pending = rest;
		this.replay([newHeld(edit, { reason, problems })]);
	}

	/**
	 * Builds the document anew from the server's: pending edits that no longer apply are held, and
	 * with them the later ones that touch the same places.
	 *
	 * @param held edits just taken out of the queue
	 */
	replay(held: Held[] = []): void {
		let document = this.#confirmed;
		const pending: Edit[] = [];
		for (const edit of this.#pending) {
			const base = held.find((one) => buildsOn(edit.operations, one));
			const result = base ? null : applyOperations(document, edit.operations);
			if (result?.status === 'applied') {
				document = result.floorplan;
				pending.push(edit);
				continue;
			}
			const problems = result?.status === 'refused' ? result.problems : null;
			// What the rules refuse after something was held most likely refers to that.
			const onto = base ?? (problems ? held.at(-1) : undefined);
			if (onto) onto.edits = [...onto.edits, edit];
			else held.push(newHeld(edit, problems && { reason: MISFIT, problems }));
		}
		this.#document = document;
		this.#pending = pending;
		this.#held = [...this.#held, ...held];
		this.#settle();
	}

	/**
	 * Decides a conflict. Mine is sent anew, from what stands there now; theirs stays, and what the
	 * edit did elsewhere is kept. Null where nothing was left to send.
	 */
	resolve(conflictId: string, choice: 'mine' | 'theirs'): ApplyResult | null {
		const held = this.#held.find(({ id, refusal }) => id === conflictId && refusal === null);
		if (!held) return null;
		return this.#resubmit(
			held,
			choice === 'mine'
				? mineOperations(held, this.#document, this.#history.removed)
				: theirsOperations(held, this.#document)
		);
	}

	/** Gives up a refused edit. */
	dismiss(refusalId: string): void {
		const held = this.#held.find(({ id, refusal }) => id === refusalId && refusal !== null);
		if (held) this.#release(held);
	}

	/** Sends what is left of held edits as an edit of its own, and lets go of them. */
	#resubmit(held: Held, operations: Edit['operations']): ApplyResult | null {
		this.#held = this.#held.filter((other) => other !== held);
		const edit = { id: this.#options.newId(), label: held.edits[0].label, operations };
		const result = operations.length > 0 ? this.submit(edit) : null;
		if (result && result.status !== 'applied') {
			const problems = result.status === 'refused' ? result.problems : [];
			this.#held = [...this.#held, { ...held, refusal: { reason: MISFIT, problems } }];
		} else {
			this.#release(held);
		}
		return result;
	}

	#release(held: Held): void {
		this.#held = this.#held.filter((other) => other !== held);
		for (const { id } of held.edits) this.#options.onDone(id);
	}

	/** Takes an edit that the server has out of the queue and of what is held; false where it is in neither. */
	#drop(id: string): boolean {
		const isPending = this.#pending.some((edit) => edit.id === id);
		const isHeld = this.#held.some(({ edits }) => edits.some((edit) => edit.id === id));
		if (!isPending && !isHeld) return false;
		this.#pending = this.#pending.filter((edit) => edit.id !== id);
		this.#held = this.#held
			.map((held) => ({ ...held, edits: held.edits.filter((edit) => edit.id !== id) }))
			.filter(({ edits }) => edits.length > 0);
		this.#options.onDone(id);
		return true;
	}

	/** Sends held edits that nothing stands against (any more): both did the same. */
	#settle(): void {
		for (const held of [...this.#held]) {
			if (held.refusal || !this.#held.includes(held)) continue;
			if (conflictsOf(held, this.#document).length > 0) continue;
			this.#resubmit(held, mineOperations(held, this.#document, this.#history.removed));
		}
	}
}

function newHeld(edit: Edit, refusal: Held['refusal']): Held {
	return { id: edit.id, edits: [edit], refusal, disputed: new Set() };
}
