import type { Circuit } from './circuit.ts';
import type { Evaluation } from './evaluation.ts';
import { solveGmres } from './gmres.ts';
import type { PortSolver, Step } from './port-solver.ts';

/** Where the inner iteration ends: the outer one gains this factor per step. */
const INNER_TOLERANCE = 1e-5;
const RESTART = 40;
const MAX_INNER = 200;

export interface LinearisedStep {
	readonly step: Step;
	readonly iterations: number;
	/** Relative residual of the step's equations. */
	readonly residual: number;
}

/**
 * The Newton step with the loads' slopes. Without slopes it is the port solver's answer; with them
 * the port solver P is the right-hand preconditioner of GMRES: J = P + S with S the slopes of the
 * loads, so J P^-1 w = w + S P^-1 w, and the step is P^-1 w.
 */
export function solveLinearised(
	circuit: Circuit,
	solver: PortSolver,
	evaluation: Evaluation,
	loopTargets: Float64Array,
	shouldStop?: () => boolean
): LinearisedStep {
	const { loads, held } = circuit;
	const { loadSlope, mismatchA } = evaluation;
	const plain = solver.solve(mismatchA, loopTargets);
	if (!loadSlope.some((slope) => slope !== 0)) return { step: plain, iterations: 0, residual: 0 };

	const count = mismatchA.length;
	/** Adds S dv: what the loads take more at raised voltages. */
	function addSlopes(voltage: Float64Array, into: Float64Array): void {
		for (let load = 0; load < loads.count; load++) {
			if (loadSlope[load] === 0) continue;
			const node = loads.node[load];
			const ground = loads.groundNode[load];
			const amps = loadSlope[load] * (voltage[node] - (ground < 0 ? 0 : voltage[ground]));
			if (held[node] === 0) into[node] += amps;
			if (ground >= 0 && held[ground] === 0) into[ground] -= amps;
		}
	}
	const noTargets = new Float64Array(loopTargets.length);
	// The loops' targets are met by `plain`; what is left is the loads' answer to it.
	const right = new Float64Array(count);
	addSlopes(plain.voltage, right);
	for (let node = 0; node < count; node++) right[node] = -right[node];
	const weights = new Float64Array(count);
	const result = solveGmres(
		(w, into) => {
			into.set(w);
			addSlopes(solver.solve(w, noTargets).voltage, into);
		},
		right,
		weights,
		{ tolerance: INNER_TOLERANCE, restart: RESTART, maxIterations: MAX_INNER, shouldStop }
	);
	const rest = solver.solve(weights, noTargets);
	return {
		step: {
			voltage: plain.voltage.map((volts, node) => volts + rest.voltage[node]),
			correction: plain.correction.map((volts, s) => volts + rest.correction[s])
		},
		iterations: result.iterations,
		residual: result.residual
	};
}
