import type { EditDraft, Operation } from '#lib/floorplan/edits/index.ts';

/** One action of a person: the operations that take it back, or, once undone, do it again. */
interface Step {
	readonly label: string;
	readonly operations: readonly Operation[];
}

/** Steps kept; older ones are forgotten. */
const MOST_STEPS = 500;

/** A step on offer: the edit that takes it, and what to call when that worked or never will. */
export interface StepOffer {
	readonly draft: EditDraft;
	/** It took effect; `inverse` leads back. */
	taken(inverse: readonly Operation[]): void;
	/** It no longer fits the document. */
	dropped(): void;
}

/**
 * What can be undone and done again. Only a person's own edits are here: undo sends the inverse as
 * an ordinary edit, so it never takes back what somebody else has done. Selection and camera are no
 * part of it.
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

	/** Records an edit that took effect; what was undone before can no longer be done again. */
	record(label: string, inverse: readonly Operation[]): void {
		this.#done.push({ label, operations: inverse });
		if (this.#done.length > MOST_STEPS) this.#done.shift();
		this.#undone = [];
	}

	undo(): StepOffer | null {
		return this.#offer('Undo', this.#done, this.#undone);
	}

	redo(): StepOffer | null {
		return this.#offer('Redo', this.#undone, this.#done);
	}

	#offer(word: string, from: Step[], to: Step[]): StepOffer | null {
		const step = from.at(-1);
		if (!step) return null;
		const label = `${word}: ${step.label}`.slice(0, 200);
		return {
			draft: { label, operations: [...step.operations] },
			taken(inverse) {
				from.pop();
				to.push({ label: step.label, operations: inverse });
			},
			dropped: () => void from.pop()
		};
	}

	clear(): void {
		this.#done = [];
		this.#undone = [];
	}
}
