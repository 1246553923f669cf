import type { Points } from './points.ts';
import type { Runs } from './runs.ts';
import { lowerBoundNear } from './search.ts';

/**
 * Answers which point of a set of parallel runs is nearest to a place (straight distance, ties:
 * lowest index). Made for millions of questions that come in spatial order: it remembers where the
 * last answers were, which changes the time an answer takes but never the answer.
 */
export class NearestPoint {
	readonly #runs: Runs;
	readonly #points: Points;
	/** Runs searched, ascending coordinate. */
	readonly #run: Int32Array;
	/** Coordinate of each searched run. */
	readonly #acrossNm: Int32Array;
	/** Last lower bound along each searched run. */
	readonly #hint: Int32Array;
	#lastLine = 0;
	#foundRun = -1;

	/** Searches the runs of one group that `isIncluded` marks with 1. */
	constructor(runs: Runs, points: Points, group: number, isIncluded: Uint8Array) {
		this.#runs = runs;
		this.#points = points;
		const included: number[] = [];
		for (let run = runs.groupStart[group]; run < runs.groupStart[group + 1]; run++) {
			if (isIncluded[run] === 1) included.push(run);
		}
		this.#run = Int32Array.from(included);
		this.#acrossNm = this.#run.map((run) => runs.coordinateNm[run]);
		this.#hint = this.#run.map((run) => points.start[run]);
	}

	/** The run of the last answer of `find`, or -1. */
	get foundRun(): number {
		return this.#foundRun;
	}

	/** Index of the nearest point, or -1 where there are no runs. */
	find(alongNm: number, acrossNm: number): number {
		const { startNm, endNm } = this.#runs;
		const { start, alongNm: position } = this.#points;
		const lines = this.#run.length;
		let best = Infinity;
		let bestPoint = -1;
		this.#foundRun = -1;
		let above = lowerBoundNear(this.#acrossNm, 0, lines, acrossNm, this.#lastLine);
		this.#lastLine = above;
		let below = above - 1;
		while (below >= 0 || above < lines) {
			const down = below >= 0 ? acrossNm - this.#acrossNm[below] : Infinity;
			const up = above < lines ? this.#acrossNm[above] - acrossNm : Infinity;
			const across = down <= up ? down : up;
			const acrossSquared = across * across;
			if (acrossSquared > best) break;
			const line = down <= up ? below-- : above++;
			const run = this.#run[line];
			const gap =
				alongNm < startNm[run]
					? startNm[run] - alongNm
					: alongNm > endNm[run]
						? alongNm - endNm[run]
						: 0;
			if (acrossSquared + gap * gap > best) continue;
			const right = lowerBoundNear(position, start[run], start[run + 1], alongNm, this.#hint[line]);
			this.#hint[line] = right;
			for (let p = right > start[run] ? right - 1 : right; p <= right; p++) {
				if (p === start[run + 1]) break;
				const along = position[p] - alongNm;
				const squared = acrossSquared + along * along;
				if (squared < best || (squared === best && p < bestPoint)) {
					best = squared;
					bestPoint = p;
					this.#foundRun = run;
				}
			}
		}
		return bestPoint;
	}
}
