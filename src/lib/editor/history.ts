import type { EditDraft, Operation } from '#lib/floorplan/edits/index.ts';

/** Edits within one burst, such as nudges by a held key, are one step of undo. */
interface Step {
	readonly label: string;
	readonly operations: readonly Operation[];
	/** Operations that lead back. */
	readonly inverse: readonly Operation[];
	readonly burst: string | null;
}

/**
 * What can be undone and done again. Only a person's own edits are here: undo sends the inverse as
 * an ordinary edit, so it never takes back what somebody else has done.
 */
export class History {
	#done: Step[] = [];
	#undone: Step[] = [];

	get undoLabel(): string | null {
		return this.#done.at(-1)?.label ?? null;
	}

	get redoLabel(): string | null {
		return this.#undone.at(-1)?.label ?? null;
	}

	/** Records an edit that took effect; one of the same burst joins the last step. */
	record(
		{ label, operations }: EditDraft,
		inverse: readonly Operation[],
		burst: string | null = null
	): void {
		const last = this.#done.at(-1);
		if (burst !== null && last?.burst === burst) {
			this.#done[this.#done.length - 1] = {
				...last,
				operations: [...last.operations, ...operations],
				inverse: [...inverse, ...last.inverse]
			};
		} else {
			this.#done.push({ label, operations, inverse, burst });
		}
		this.#undone = [];
	}

	/** The edit that undoes the last step, or null; `undone` tells that it took effect. */
	undo(): { readonly draft: EditDraft; undone(): void } | null {
		const step = this.#done.at(-1);
		if (!step) return null;
		return {
			draft: { label: `Undo: ${step.label}`.slice(0, 200), operations: [...step.inverse] },
			undone: () => {
				this.#done.pop();
				this.#undone.push(step);
			}
		};
	}

	/** The edit that does the last undone step again, or null; `redone` tells that it took effect. */
	redo(): { readonly draft: EditDraft; redone(): void } | null {
		const step = this.#undone.at(-1);
		if (!step) return null;
		return {
			draft: { label: `Redo: ${step.label}`.slice(0, 200), operations: [...step.operations] },
			redone: () => {
				this.#undone.pop();
				this.#done.push({ ...step, burst: null });
			}
		};
	}
}
