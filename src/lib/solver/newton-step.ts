import type { Circuit } from './circuit.ts';
import { LOOP_HOLDING, moved, senseErrors, type Evaluation, type Unknowns } from './evaluation.ts';
import { solveLinearised, type LinearisedStep } from './linearised.ts';
import type { PortSolver } from './port-solver.ts';

/** A loop's error this small is rounding: it does not tell to which end the loop goes, V. */
const TELLING_ERROR_V = 1e-9;

/** What each loop's equation has to take to zero, V. */
function loopTargets(
	circuit: Circuit,
	unknowns: Unknowns,
	errorV: Float64Array,
	loop: Int8Array,
	powerless: readonly boolean[]
): Float64Array {
	return errorV.map((error, s) => {
		const { rangeV } = circuit.senses[s];
		if (loop[s] !== LOOP_HOLDING) return loop[s] * rangeV - unknowns.correction[s];
		return powerless[s] ? Math.sign(error) * rangeV - unknowns.correction[s] : error;
	});
}

/** Where an iteration stands: its unknowns, their laws, and the ends of its loops. */
export interface Standing {
	readonly unknowns: Unknowns;
	readonly evaluation: Evaluation;
	readonly loop: Int8Array;
	/** Mismatch as a fraction of the load. */
	readonly relative: number;
}

/** Loops that hold, although no unit follows them: their correction goes to an end of its range. */
export function looseLoops(solver: PortSolver, loop: Int8Array): boolean[] {
	return solver.powerless.map((is, s) => is && loop[s] === LOOP_HOLDING);
}

/**
 * The Newton step on the present pieces. A loose loop goes to the end that its error tells. Where the
 * last unit that followed has just met its bound, the mean stands at nominal still and rounding would
 * choose the end: there the error after the step tells it, the side on which the unit stays.
 */
export function newtonStep(
	circuit: Circuit,
	solver: PortSolver,
	{ unknowns, evaluation, loop, relative }: Standing,
	shouldStop?: () => boolean
): LinearisedStep {
	const { senseErrorV } = evaluation;
	const aimedBy = (errorV: Float64Array) => {
		const targets = loopTargets(circuit, unknowns, errorV, loop, solver.powerless);
		return solveLinearised(circuit, solver, evaluation, targets, relative, shouldStop);
	};
	const first = aimedBy(senseErrorV);
	const untold = looseLoops(solver, loop).map(
		(is, s) => is && Math.abs(senseErrorV[s]) <= TELLING_ERROR_V
	);
	if (!untold.includes(true)) return first;
	const after = senseErrors(circuit, moved(unknowns, first.step, 1).voltage);
	const second = aimedBy(senseErrorV.map((error, s) => (untold[s] ? after[s] : error)));
	return { step: second.step, iterations: first.iterations + second.iterations };
}
