import { firstBorder } from './border.ts';
import type { Circuit } from './circuit.ts';
import { currentScale, evaluate, moved, type Evaluation, type Unknowns } from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { leaksOf } from './leaks.ts';
import { looseLoops, newtonStep } from './newton-step.ts';
import { createPortSolver, type PortSolver } from './port-solver.ts';
import { PIECE_REGULATING } from './regulator-law.ts';

/** Where the iteration aims, relative to the load, and what it accepts where rounding stops it. */
const TARGET_RELATIVE = 1e-12;
export const ACCEPTED_RELATIVE = 1e-7;
/** Below this, a step that does not halve the mismatch is the last. */
const ROUNDING_RELATIVE = 1e-10;
/** A loop is answered when this is left of its error, V; and where rounding stops it. */
const LOOP_TARGET_V = 1e-12;
const LOOP_ACCEPTED_V = 1e-9;
/** Steps beyond the stage's number that a nearly finished iteration gets. */
const LAST_STEPS = 5;
/** Steps of the line search: down to 2^-12. */
const MAX_HALVINGS = 12;
/** A line-search step must take this part of what a full step promises. */
const SUFFICIENT = 1e-4;
/** What the mismatch may grow by while a part drifts to a border, which cannot take any of it away. */
const DRIFT_RISE = 2;

export interface NewtonOptions {
	readonly onStep?: (step: number, relative: number) => void;
	readonly shouldStop?: () => boolean;
}

export interface StageOptions extends NewtonOptions {
	/** Slope of flat pieces, see `pieceOf`: 0 is the law itself. */
	readonly leak: number;
	readonly maxSteps: number;
	/** Mismatch, relative to the load, at which the stage ends. */
	readonly target?: number;
	/** Takes every unit for regulating in the first step: nominal volts lie on a border of the law. */
	readonly startLinear?: boolean;
	/** What to do where pieces come back or a step finds no reduction. */
	readonly onCycle: 'give-up' | 'pivot';
	/** Changes one piece at a time from the first step on. */
	readonly pivotOnly?: boolean;
}

export interface NewtonResult {
	readonly status: 'converged' | 'stuck' | 'stopped';
	readonly unknowns: Unknowns;
	readonly evaluation: Evaluation;
	/** Largest mismatch over the current scale. */
	readonly relative: number;
	readonly steps: number;
	readonly iterations: number;
}

function relativeOf(circuit: Circuit, evaluation: Evaluation): number {
	return evaluation.maxMismatchA / currentScale(circuit, evaluation);
}

function loopsWithin(evaluation: Evaluation, volts: number): boolean {
	return evaluation.senseMismatchV.every((left) => Math.abs(left) <= volts);
}

/** Whether an iteration may end where rounding stops it: loops and a mismatch up to `limit`. */
function isAcceptable(evaluation: Evaluation, relative: number, limit: number): boolean {
	return relative <= limit && loopsWithin(evaluation, LOOP_ACCEPTED_V);
}

/**
 * Semismooth Newton with the active set: the pieces that hold at the present voltages give an exact
 * Jacobian; a step that does not reduce the mismatch is halved. Where a set of pieces comes back, or
 * halving does not help, the stage gives up or follows the straight path to the next border and
 * changes one piece at a time (Katzenelson 1965; it cannot cycle where the Jacobians of all pieces
 * have one sign, Fujisawa and Kuh 1972).
 */
export function solveStage(
	circuit: Circuit,
	grid: GridFactors,
	start: Unknowns,
	options: StageOptions
): NewtonResult {
	const { leak: stageLeak, target = TARGET_RELATIVE } = options;
	let unknowns = start;
	let evaluation = evaluate(circuit, unknowns, stageLeak);
	let best = { unknowns, evaluation };
	let piece = Uint8Array.from(evaluation.piece);
	let loop = Int8Array.from(evaluation.loop);
	if (options.startLinear === true) piece.fill(PIECE_REGULATING);
	let solver: PortSolver | null = null;
	let solverKey = '';
	let pivoting = options.pivotOnly === true;
	const seen = new Set<string>();
	let steps = 0;
	let iterations = 0;
	let stalled = 0;

	const finish = (status: NewtonResult['status']): NewtonResult => {
		const at = status === 'converged' ? { unknowns, evaluation } : best;
		const relative = relativeOf(circuit, at.evaluation);
		return { status, ...at, relative, steps, iterations };
	};
	/** Ends where rounding is all that is left. */
	const finishAtBest = (): NewtonResult => {
		({ unknowns, evaluation } = best);
		const limit = Math.max(target, ACCEPTED_RELATIVE);
		const accepted = isAcceptable(evaluation, relativeOf(circuit, evaluation), limit);
		return finish(accepted ? 'converged' : 'stuck');
	};

	while (true) {
		const relative = relativeOf(circuit, evaluation);
		options.onStep?.(steps, relative);
		if (options.shouldStop?.() === true) return finish('stopped');
		if (relative <= target && loopsWithin(evaluation, LOOP_TARGET_V)) return finish('converged');
		const allowance = relative <= ACCEPTED_RELATIVE ? LAST_STEPS : 0;
		if (steps >= options.maxSteps + allowance) return finishAtBest();

		const { loadSlope } = evaluation;
		const { leaks, drifts } = leaksOf(circuit, grid, piece, stageLeak, loadSlope, pivoting);
		const key = `${piece.join('')}|${loop.join('')}`;
		const fullKey = `${key}|${leaks.join(',')}`;
		if (solver === null || solverKey !== fullKey) {
			solver = createPortSolver(circuit, grid, piece, leaks, loop);
			if (solver === null) return finishAtBest();
			solverKey = fullKey;
		}
		const { step, iterations: inner } = newtonStep(
			circuit,
			solver,
			{ unknowns, evaluation, loop, relative },
			options.shouldStop
		);
		steps++;
		iterations += inner;

		const border = pivoting ? firstBorder(circuit, unknowns, step, piece, loop, stageLeak) : null;
		let t = border === null ? 1 : border.t;
		let trial = moved(unknowns, step, t);
		let next = evaluate(circuit, trial, stageLeak);
		// On a straight path the mismatch falls in proportion; there only bent loads can raise it, and
		// a loop that no unit follows, whose error may grow while its correction goes to the end. On a
		// drift what is missing goes from place to place until a unit leaves its bound.
		const isLoose = looseLoops(solver, loop).includes(true);
		const allowed = () => {
			if (!pivoting) return (1 - SUFFICIENT * t) * evaluation.merit;
			if (isLoose) return Infinity;
			return evaluation.merit * (drifts ? DRIFT_RISE : 1 + 1e-9);
		};
		for (let h = 0; h < MAX_HALVINGS && t > 0 && next.merit > allowed(); h++) {
			t /= 2;
			trial = moved(unknowns, step, t);
			next = evaluate(circuit, trial, stageLeak);
		}
		if (!pivoting && next.merit > allowed()) {
			const isDone = isAcceptable(evaluation, relative, ACCEPTED_RELATIVE);
			if (isDone || options.onCycle === 'give-up') return finishAtBest();
			pivoting = true;
			continue;
		}
		const slow = next.merit > 0.5 * evaluation.merit;
		unknowns = trial;
		evaluation = next;
		if (!pivoting) {
			if (slow && isAcceptable(evaluation, relative, ROUNDING_RELATIVE)) return finishAtBest();
			const found = `${evaluation.piece.join('')}|${evaluation.loop.join('')}`;
			if (found !== key && seen.has(found)) {
				if (options.onCycle === 'give-up') return finishAtBest();
				pivoting = true;
			}
			seen.add(found);
			piece = Uint8Array.from(evaluation.piece);
			loop = Int8Array.from(evaluation.loop);
		} else if (border !== null && t === border.t) {
			(border.list === 'piece' ? piece : loop)[border.index] = border.value;
		}
		if (evaluation.merit < 0.999 * best.evaluation.merit) stalled = 0;
		else stalled++;
		if (evaluation.merit < best.evaluation.merit) best = { unknowns, evaluation };
		if (stalled > 4 * (circuit.regulators.count + 10)) return finishAtBest();
	}
}
