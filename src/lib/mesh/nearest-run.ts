import type { Runs } from './runs.ts';
import { lowerBound } from './search.ts';

/** Where a point meets the nearest run: its foot point. */
export interface Foot {
	readonly run: number;
	/** Position of the foot along the run, nm. */
	readonly alongNm: number;
	readonly distanceNm: number;
}

/**
 * The run of [from, to) (one group, sorted by coordinate) nearest to a point; ties: lowest index.
 * Searches outwards from the point's own coordinate and stops where no closer run can follow.
 */
export function nearestRun(
	runs: Runs,
	from: number,
	to: number,
	alongNm: number,
	acrossNm: number
): Foot | null {
	let best = Infinity;
	let bestRun = -1;
	let above = lowerBound(runs.coordinateNm, from, to, acrossNm);
	let below = above - 1;
	while (below >= from || above < to) {
		const down = below >= from ? acrossNm - runs.coordinateNm[below] : Infinity;
		const up = above < to ? runs.coordinateNm[above] - acrossNm : Infinity;
		const across = Math.min(down, up);
		if (across * across > best) break;
		const run = down <= up ? below-- : above++;
		const gap = Math.max(0, runs.startNm[run] - alongNm, alongNm - runs.endNm[run]);
		const squared = across * across + gap * gap;
		if (squared < best || (squared === best && run < bestRun)) {
			best = squared;
			bestRun = run;
		}
	}
	if (bestRun < 0) return null;
	return {
		run: bestRun,
		alongNm: Math.min(Math.max(alongNm, runs.startNm[bestRun]), runs.endNm[bestRun]),
		distanceNm: Math.sqrt(best)
	};
}
