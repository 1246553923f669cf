import type { Floorplan } from '#lib/floorplan/index.ts';
import { resistancesAt, type Network } from '#lib/mesh/index.ts';
import { assemblePoint, residualOf } from './assemble-point.ts';
import { collapsedShortages, ratedShortages, voltlessLoads } from './capacity.ts';
import { buildCircuit } from './circuit.ts';
import { createGridCache } from './grid-cache.ts';
import type { SolveOptions, SolveOutcome } from './operating-point.ts';
import { floatingProblem, stuckProblem, tooLargeProblem, unprovenProblem } from './problems.ts';
import { solveFromStarts } from './start.ts';

/** What the contract asks of every result. */
const REQUIRED_RELATIVE = 1e-6;
const METHOD = 'semismooth Newton, nested-dissection Cholesky per net, regulator ports';

/** Finds an item by id, or the first; a wrong id is a programmer's mistake. */
function itemById<T extends { readonly id: string }>(list: readonly T[], id?: string): T {
	const found = id === undefined ? list[0] : list.find((item) => item.id === id);
	if (found === undefined) throw new RangeError(`there is no item "${id}" in the plan`);
	return found;
}

/**
 * The static operating point of one mode and corner: every node voltage, regulator current and
 * state, load current and loop correction, with the figures that prove it. `unsolvable` says what a
 * person can mend; `not-converged` carries the best mismatch; neither carries voltages.
 */
export function solveOperatingPoint(
	floorplan: Floorplan,
	network: Network,
	options: SolveOptions
): SolveOutcome {
	const { now, onProgress, shouldStop } = options;
	const begin = now();
	onProgress?.({ phase: 'setup' });
	const mode = itemById(floorplan.modes, options.mode);
	const corner = itemById(floorplan.corners, options.corner);
	const scaled = resistancesAt(network, floorplan, corner);
	if (scaled.status === 'refused') return { status: 'unsolvable', problems: scaled.problems };
	const circuit = buildCircuit(floorplan, network, mode, corner, scaled.ohm);
	const cache = options.cache ?? createGridCache(network);
	const voltless = voltlessLoads(circuit);
	if (voltless.length > 0) return { status: 'unsolvable', problems: voltless };
	const short = ratedShortages(circuit, cache.pattern.part);
	if (short.length > 0) return { status: 'unsolvable', problems: short };
	if (shouldStop?.() === true) return { status: 'stopped' };

	onProgress?.({ phase: 'factor' });
	const factored = cache.factors(circuit);
	if (factored.status === 'floating') {
		return { status: 'unsolvable', problems: [floatingProblem(network, factored.node)] };
	}
	if (factored.status === 'too-large') {
		return { status: 'unsolvable', problems: [tooLargeProblem(network, factored)] };
	}
	const { grid } = factored;
	if (shouldStop?.() === true) return { status: 'stopped' };
	const solving = now();

	const newton = solveFromStarts(circuit, grid, {
		shouldStop,
		onStep: (step, mismatch) => onProgress?.({ phase: 'solve', step, mismatch })
	});
	if (newton.status === 'stopped') return { status: 'stopped' };
	if (newton.status === 'stuck') {
		return {
			status: 'not-converged',
			problems: [stuckProblem(floorplan, circuit, newton)],
			kclMaxA: newton.evaluation.maxMismatchA,
			kclRelative: newton.relative,
			newtonSteps: newton.steps
		};
	}

	const starved = collapsedShortages(
		circuit,
		grid.part,
		newton.unknowns.voltage,
		newton.evaluation
	);
	if (starved.length > 0) return { status: 'unsolvable', problems: starved };

	onProgress?.({ phase: 'proof' });
	const point = assemblePoint(floorplan, circuit, newton);
	const { proof } = point;
	const balanced =
		proof.kclRelative <= REQUIRED_RELATIVE && proof.powerRelative <= REQUIRED_RELATIVE;
	if (!balanced || !proof.statesConsistent) {
		return {
			status: 'not-converged',
			problems: [unprovenProblem(proof, REQUIRED_RELATIVE)],
			kclMaxA: proof.kclMaxA,
			kclRelative: proof.kclRelative,
			newtonSteps: newton.steps
		};
	}
	const end = now();
	return {
		status: 'solved',
		point: {
			...point,
			statistics: {
				method: METHOD,
				newtonSteps: newton.steps,
				iterations: newton.iterations,
				residual: residualOf(circuit, newton),
				setupSeconds: solving - begin,
				solveSeconds: end - solving
			}
		}
	};
}
