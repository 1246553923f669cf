import { toNm } from '#lib/floorplan/index.ts';
import { MAX_NODES, PIECES_WITHOUT_CROSSINGS } from './constants.ts';
import type { Crossings } from './crossings.ts';
import type { ModelProblem } from './network.ts';
import { type PlanIndex } from './plan-index.ts';
import type { Runs } from './runs.ts';
import { lowerBound } from './search.ts';
import type { TapList, Taps } from './taps.ts';

/**
 * The points of every run: its ends, crossings, taps and divisions. Points of kept runs become
 * nodes in the same order.
 *
 * Invariants: positions of a run strictly increase, its first is the run's start and its last the
 * run's end, so a run has at least two.
 */
export interface Points {
	readonly count: number;
	/** First point of each run; the run ends where the next begins. Length `runs.count` + 1. */
	readonly start: Int32Array;
	/** Position along the run, nm. Length `count`. */
	readonly alongNm: Int32Array;
}

export type PointsResult =
	| { readonly status: 'placed'; readonly points: Points }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };

function tapLists(taps: Taps): readonly TapList[] {
	return [taps.feeds, taps.outputs, taps.inputs, taps.grounds];
}

/** Sorts [from, to) where it is not sorted yet and drops repeats; gives the new end. */
function sortUnique(values: Int32Array, from: number, to: number): number {
	for (let p = from + 1; p < to; p++) {
		if (values[p] >= values[p - 1]) continue;
		values.subarray(from, to).sort();
		break;
	}
	let end = from + 1;
	for (let p = from + 1; p < to; p++) {
		if (values[p] !== values[end - 1]) values[end++] = values[p];
	}
	return end;
}

/** Ends, crossings and taps of each run, sorted and distinct, in [start[run], end[run]). */
function gatherPoints(
	runs: Runs,
	crossings: Crossings,
	taps: Taps
): { start: Int32Array; end: Int32Array; alongNm: Int32Array } {
	const { horizontalRun, verticalRun } = crossings;
	const start = new Int32Array(runs.count + 1);
	for (let c = 0; c < crossings.count; c++) {
		start[horizontalRun[c] + 1]++;
		start[verticalRun[c] + 1]++;
	}
	for (const { run } of tapLists(taps)) {
		for (const r of run) if (r >= 0) start[r + 1]++;
	}
	for (let run = 0; run < runs.count; run++) start[run + 1] += start[run] + 2;

	const alongNm = new Int32Array(start[runs.count]);
	const end = start.slice(0, runs.count);
	for (let run = 0; run < runs.count; run++) alongNm[end[run]++] = runs.startNm[run];
	for (let c = 0; c < crossings.count; c++) {
		const h = horizontalRun[c];
		const v = verticalRun[c];
		alongNm[end[h]++] = runs.coordinateNm[v];
		alongNm[end[v]++] = runs.coordinateNm[h];
	}
	for (const { run, alongNm: foot } of tapLists(taps)) {
		for (let t = 0; t < run.length; t++) if (run[t] >= 0) alongNm[end[run[t]]++] = foot[t];
	}
	for (let run = 0; run < runs.count; run++) {
		alongNm[end[run]++] = runs.endNm[run];
		end[run] = sortUnique(alongNm, start[run], end[run]);
	}
	return { start, end, alongNm };
}

/** Equal parts into which a piece of whole nanometres is divided so that none exceeds `maxNm`. */
function partsOf(lengthNm: number, maxNm: number): number {
	return Math.min(lengthNm, Math.ceil(lengthNm / maxNm));
}

/** Places the points of every run and divides the pieces between them that are too long. */
export function placePoints(
	{ floorplan, netCount }: PlanIndex,
	runs: Runs,
	crossings: Crossings,
	taps: Taps
): PointsResult {
	const gathered = gatherPoints(runs, crossings, taps);
	const maxSegmentNm =
		floorplan.mesh.maxSegmentUm === undefined ? null : toNm(floorplan.mesh.maxSegmentUm);
	const hasCrossings = new Uint8Array(netCount);
	for (const batch of crossings.batches) hasCrossings[batch.net] = 1;

	/** Longest piece allowed on a run, nm. */
	function maxPieceNm(run: number): number {
		if (maxSegmentNm !== null) return maxSegmentNm;
		if (hasCrossings[runs.net[run]] === 1) return Infinity;
		return (runs.endNm[run] - runs.startNm[run]) / PIECES_WITHOUT_CROSSINGS;
	}

	const start = new Int32Array(runs.count + 1);
	let count = 0;
	for (let run = 0; run < runs.count; run++) {
		start[run] = count;
		const from = gathered.start[run];
		const to = gathered.end[run];
		count += to - from;
		const maxNm = maxPieceNm(run);
		if (maxNm !== Infinity) {
			for (let p = from + 1; p < to; p++) {
				count += partsOf(gathered.alongNm[p] - gathered.alongNm[p - 1], maxNm) - 1;
			}
		}
		if (count > MAX_NODES) return { status: 'refused', problems: [tooManyNodes()] };
	}
	start[runs.count] = count;

	const alongNm = new Int32Array(count);
	let next = 0;
	for (let run = 0; run < runs.count; run++) {
		const from = gathered.start[run];
		const to = gathered.end[run];
		const maxNm = maxPieceNm(run);
		alongNm[next++] = gathered.alongNm[from];
		for (let p = from + 1; p < to; p++) {
			const left = gathered.alongNm[p - 1];
			const length = gathered.alongNm[p] - left;
			const parts = maxNm === Infinity ? 1 : partsOf(length, maxNm);
			for (let part = 1; part < parts; part++) {
				alongNm[next++] = left + Math.round((length * part) / parts);
			}
			alongNm[next++] = left + length;
		}
	}
	return { status: 'placed', points: { count, start, alongNm } };
}

function tooManyNodes(): ModelProblem {
	return {
		path: 'straps',
		message:
			`the plan has more than ${MAX_NODES} nodes (expected larger pitches, smaller regions ` +
			`or a larger mesh.maxSegmentUm)`
	};
}

/** The point of a run at a position that is one of its points. */
export function pointAt(points: Points, run: number, alongNm: number): number {
	return lowerBound(points.alongNm, points.start[run], points.start[run + 1], alongNm);
}
