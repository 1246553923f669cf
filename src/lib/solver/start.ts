import type { Circuit } from './circuit.ts';
import { seenRatio } from './capacity.ts';
import { gather } from './gather.ts';
import type { Unknowns } from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { solveStage, type NewtonOptions, type NewtonResult } from './newton.ts';

/** Fraction of nominal at which a block that is taken for collapsed starts. */
const COLLAPSED_START = 0.05;
/** A block that sees less than this where the iteration stuck is taken for collapsed. */
const SUSPECT_RATIO = 0.6;
const MAX_RESTARTS = 8;

/** Every net at its nominal volts, no correction, and the given blocks' nodes near zero. */
export function startingPoint(circuit: Circuit, collapsed: ReadonlySet<number>): Unknowns {
	const { network, nominalV, loads, feeds } = circuit;
	const startV = network.nets.map(({ kind }, net) => (kind === 'ground' ? 0 : nominalV[net]));
	const voltage = gather(startV, network.nodes.net);
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

/** Steps of the plain iteration before the way over leaking laws is taken. */
const PLAIN_STEPS = 25;
const STAGE_STEPS = 40;
/** Steps that a stage gets beyond these for every unit, which may have to change its piece. */
const STEPS_PER_UNIT = 2;
/** Steps after which no further start is tried. */
const MAX_TOTAL_STEPS = 400;
/** Slopes of the flat pieces on the way to the law itself. */
const LEAKS = [1e-1, 1e-2, 1e-4, 1e-6];
/** Mismatch at which a law on the way is left, relative to the load. */
const STAGE_TARGET = 1e-6;

/**
 * From one starting point to the law itself: plain Newton; where states come back or no step helps,
 * over laws whose flat pieces have a slope that goes to zero. Each of those has one solution that
 * moves little from the one before, and no singular Jacobian on the way.
 * @param pivotOnly changes one piece at a time throughout, without the plain iteration
 */
export function solveNewton(
	circuit: Circuit,
	grid: GridFactors,
	start: Unknowns,
	options: NewtonOptions & { readonly pivotOnly?: boolean } = {}
): NewtonResult {
	const stageSteps = STAGE_STEPS + STEPS_PER_UNIT * circuit.regulators.count;
	let steps = 0;
	let iterations = 0;
	const counted = (result: NewtonResult): NewtonResult => ({
		...result,
		steps: (steps += result.steps),
		iterations: (iterations += result.iterations)
	});
	const onStep = (step: number, relative: number) => options.onStep?.(steps + step, relative);
	let result: NewtonResult | null = null;
	if (options.pivotOnly !== true) {
		result = counted(
			solveStage(circuit, grid, start, {
				...options,
				onStep,
				leak: 0,
				maxSteps: PLAIN_STEPS,
				startLinear: true,
				onCycle: 'give-up'
			})
		);
		if (result.status !== 'stuck') return result;
	}
	let at = start;
	for (const leak of LEAKS) {
		const stage = counted(
			solveStage(circuit, grid, at, {
				...options,
				onStep,
				leak,
				maxSteps: stageSteps,
				target: STAGE_TARGET,
				startLinear: at === start && options.pivotOnly !== true,
				onCycle: 'pivot'
			})
		);
		if (stage.status === 'stopped') return stage;
		if (stage.status === 'stuck') {
			if (result === null || stage.relative < result.relative) result = stage;
			break;
		}
		at = stage.unknowns;
	}
	const last = counted(
		solveStage(circuit, grid, at, {
			...options,
			onStep,
			leak: 0,
			maxSteps: stageSteps,
			onCycle: 'pivot'
		})
	);
	return last.status !== 'stuck' || result === null || last.relative < result.relative
		? last
		: { ...result, steps, iterations };
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
	let steps = result.steps;
	for (let restart = 1; restart <= MAX_RESTARTS && result.status === 'stuck'; restart++) {
		const candidates = [...lowestRatios(circuit, result.unknowns.voltage)]
			.filter(([block]) => !collapsed.has(block))
			.sort((a, b) => a[1] - b[1] || a[0] - b[0]);
		if (candidates.length === 0 || steps >= MAX_TOTAL_STEPS) break;
		candidates.forEach(([block, ratio], rank) => {
			if (rank === 0 || ratio < SUSPECT_RATIO || restart === MAX_RESTARTS) collapsed.add(block);
		});
		result = solveNewton(circuit, grid, startingPoint(circuit, collapsed), options);
		steps += result.steps;
		if (result.relative < best.relative || result.status !== 'stuck') best = result;
	}
	return { ...best, steps };
}
