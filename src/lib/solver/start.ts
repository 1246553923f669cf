import type { Circuit } from './circuit.ts';
import { seenRatio } from './capacity.ts';
import type { Unknowns } from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { solveNewton, type NewtonOptions, type NewtonResult } from './newton.ts';

/** Fraction of nominal at which a block that is taken for collapsed starts. */
const COLLAPSED_START = 0.05;
/** A block that sees less than this where the iteration stuck is taken for collapsed. */
const SUSPECT_RATIO = 0.6;
const MAX_RESTARTS = 8;

/** Every net at its nominal volts, no correction, and the given blocks' nodes near zero. */
export function startingPoint(circuit: Circuit, collapsed: ReadonlySet<number>): Unknowns {
	const { network, nominalV, loads, feeds } = circuit;
	const voltage = Float64Array.from(network.nodes.net, (net) =>
		network.nets[net].kind === 'ground' ? 0 : nominalV[net]
	);
	for (let load = 0; load < loads.count; load++) {
		if (collapsed.has(loads.block[load])) {
			voltage[loads.node[load]] = COLLAPSED_START * loads.volts[load];
		}
	}
	for (let f = 0; f < feeds.count; f++) {
		if (feeds.seriesOhm[f] === 0) voltage[feeds.node[f]] = feeds.volts[f];
	}
	return { voltage, correction: new Float64Array(circuit.senses.length) };
}

/** Lowest fraction of nominal that each block of falling current-voltage law sees. */
function lowestRatios(circuit: Circuit, voltage: Float64Array): Map<number, number> {
	const lowest = new Map<number, number>();
	for (let load = 0; load < circuit.loads.count; load++) {
		if (!(circuit.loads.exponent[load] < 0) || circuit.loads.nominalA[load] === 0) continue;
		const block = circuit.loads.block[load];
		const ratio = seenRatio(circuit, voltage, load);
		lowest.set(block, Math.min(lowest.get(block) ?? Infinity, ratio));
	}
	return lowest;
}

/**
 * Newton from nominal volts; where loads of falling law (constant power) leave no solution near
 * nominal, again with the weakest of them taken for collapsed, one more each time, at last all.
 */
export function solveFromStarts(
	circuit: Circuit,
	grid: GridFactors,
	options: NewtonOptions
): NewtonResult {
	const collapsed = new Set<number>();
	let result = solveNewton(circuit, grid, startingPoint(circuit, collapsed), options);
	let best = result;
	for (let restart = 1; restart <= MAX_RESTARTS && result.status === 'stuck'; restart++) {
		const candidates = [...lowestRatios(circuit, result.unknowns.voltage)]
			.filter(([block]) => !collapsed.has(block))
			.sort((a, b) => a[1] - b[1] || a[0] - b[0]);
		if (candidates.length === 0) break;
		candidates.forEach(([block, ratio], rank) => {
			if (rank === 0 || ratio < SUSPECT_RATIO || restart === MAX_RESTARTS) collapsed.add(block);
		});
		result = solveNewton(circuit, grid, startingPoint(circuit, collapsed), options);
		if (result.relative < best.relative || result.status !== 'stuck') best = result;
	}
	return best;
}
