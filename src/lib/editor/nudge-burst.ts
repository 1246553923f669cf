import type { ItemReference } from '#lib/floorplan/edits/index.ts';

/** Pause after which a run of nudges is one finished step, ms. */
export const BURST_PAUSE_MS = 600;

/** Calls back after a delay, ms; the returned function calls it off. */
export type Schedule = (delayMs: number, callback: () => void) => () => void;

/** A run of nudges: how far it has come, and the items that it moves. */
export class NudgeBurst {
	readonly items: readonly ItemReference[];
	readonly #schedule: Schedule;
	readonly #onPause: () => void;
	#stop: () => void = () => {};
	dxUm = 0;
	dyUm = 0;

	constructor(items: readonly ItemReference[], schedule: Schedule, onPause: () => void) {
		this.items = items;
		this.#schedule = schedule;
		this.#onPause = onPause;
	}

	/** One more step; the pause begins anew. */
	add(dxUm: number, dyUm: number): void {
		this.dxUm += dxUm;
		this.dyUm += dyUm;
		this.#stop();
		this.#stop = this.#schedule(BURST_PAUSE_MS, this.#onPause);
	}

	end(): void {
		this.#stop();
	}
}
