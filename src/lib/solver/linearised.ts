import type { Circuit } from './circuit.ts';
import type { Evaluation } from './evaluation.ts';
import { solveGmres } from './gmres.ts';
import type { PortSolver, Step } from './port-solver.ts';

/**
 * Where the inner iteration ends, as a part of what the loads' slopes add or of the mismatch,
 * whichever is less: near the answer at the relative mismatch itself, which keeps the outer iteration
 * superlinear (Dembo, Eisenstat and Steihaug 1982); far from it loosely, because the pieces still
 * change. A part of the mismatch, because only then the step reduces it: where units are flat but for
 * a small leak, the step without loads goes far, and the slopes of collapsed loads add to it many
 * times the mismatch.
 */
const LOOSEST_TOLERANCE = 1e-2;
const TIGHTEST_TOLERANCE = 1e-6;
/** What rounding lets the inner iteration reach, as a part of what the slopes add. */
const ROUNDING_TOLERANCE = 1e-12;
const RESTART = 40;
const MAX_INNER = 200;

export interface LinearisedStep {
	readonly step: Step;
	readonly iterations: number;
}

function addStep(target: Step, weight: number, { voltage, correction }: Step): void {
	for (let i = 0; i < voltage.length; i++) target.voltage[i] += weight * voltage[i];
	for (let s = 0; s < correction.length; s++) target.correction[s] += weight * correction[s];
}

/**
 * The Newton step with the loads' slopes. Without slopes it is the port solver's answer; with them
 * the port solver P is the right-hand preconditioner of GMRES: J = P + S with S the slopes of the
 * loads, so J P^-1 w = w + S P^-1 w, and the step is P^-1 w.
 *
 * @param relative mismatch as a fraction of the load: how near the answer is
 */
export function solveLinearised(
	circuit: Circuit,
	solver: PortSolver,
	evaluation: Evaluation,
	loopTargets: Float64Array,
	relative: number,
	shouldStop?: () => boolean
): LinearisedStep {
	const { loads, held } = circuit;
	const { loadSlope, mismatchA } = evaluation;
	const plain = solver.solve(mismatchA, loopTargets);
	if (!loadSlope.some((slope) => slope !== 0)) return { step: plain, iterations: 0 };

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
	const answer = new Float64Array(count);
	const answered: Step[] = [];
	const added = Math.sqrt(right.reduce((sum, amps) => sum + amps * amps, 0));
	const forcing = Math.min(Math.max(relative, TIGHTEST_TOLERANCE), LOOSEST_TOLERANCE);
	const tolerance = Math.max(forcing * Math.min(1, evaluation.merit / added), ROUNDING_TOLERANCE);
	const { iterations, weights } = solveGmres(
		(w, into) => {
			const found = solver.solve(w, noTargets);
			answered.push(found);
			into.set(w);
			addSlopes(found.voltage, into);
		},
		right,
		answer,
		{ tolerance, restart: RESTART, maxIterations: MAX_INNER, shouldStop }
	);
	const step = {
		voltage: Float64Array.from(plain.voltage),
		correction: Float64Array.from(plain.correction)
	};
	if (weights === null) addStep(step, 1, solver.solve(answer, noTargets));
	else weights.forEach((weight, i) => addStep(step, weight, answered[i]));
	return { step, iterations };
}
