import type { Crossings } from './crossings.ts';
import type { PlanIndex } from './plan-index.ts';
import type { Runs } from './runs.ts';
import type { Taps } from './taps.ts';

/** Connected parts of the nets and whether a source reaches them (model section 3.7). */
export interface Components {
	/** The lowest run of the part that each run belongs to. Length `runs.count`. */
	readonly root: Int32Array;
	/** 1 where the run's part has a feed (input, ground) or an enabled regulator (regulated). */
	readonly isSourced: Uint8Array;
}

/** Union and find with path halving; roots are the lowest member. */
function connect(count: number, { horizontalRun, verticalRun }: Crossings): Int32Array {
	const parent = Int32Array.from({ length: count }, (_, index) => index);
	function find(start: number): number {
		let run = start;
		while (parent[run] !== run) {
			parent[run] = parent[parent[run]];
			run = parent[run];
		}
		return run;
	}
	for (let c = 0; c < horizontalRun.length; c++) {
		const a = find(horizontalRun[c]);
		const b = find(verticalRun[c]);
		if (a < b) parent[b] = a;
		else if (b < a) parent[a] = b;
	}
	for (let run = 0; run < count; run++) parent[run] = find(run);
	return parent;
}

/** Finds the connected parts and their sources. Runs are whole, so parts are sets of runs. */
export function findComponents(
	{ floorplan }: PlanIndex,
	runs: Runs,
	crossings: Crossings,
	taps: Taps
): Components {
	const root = connect(runs.count, crossings);
	const hasSource = new Uint8Array(runs.count);
	for (const run of taps.feeds.run) {
		if (run >= 0 && floorplan.nets[runs.net[run]].kind !== 'regulated') hasSource[root[run]] = 1;
	}
	for (const [r, run] of taps.outputs.run.entries()) {
		if (run < 0 || !floorplan.regulators[r].enabled) continue;
		if (floorplan.nets[runs.net[run]].kind === 'regulated') hasSource[root[run]] = 1;
	}
	return { root, isSourced: Uint8Array.from(root, (part) => hasSource[part]) };
}
