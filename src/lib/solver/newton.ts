import { firstBorder } from './border.ts';
import type { Circuit } from './circuit.ts';
import {
	currentScale,
	evaluate,
	LOOP_HOLDING,
	moved,
	type Evaluation,
	type Unknowns
} from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { solveLinearised } from './linearised.ts';
import { createPortSolver, type PortSolver } from './port-solver.ts';
import { isFlat, PIECE_REGULATING } from './regulator-law.ts';

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
/** Slope lent to the units of a part that floats because all of them are flat. */
const FLOATING_LEAK = 1e-4;
/** The same as a part of the slope of the loads there. */
const BESIDE_LOADS = 1e-3;

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

/**
 * Leak of every unit. A part all of whose units are flat without a leak is lent a small one, which
 * says which way it drifts; where its loads have a slope of their own, one that is small beside it.
 */
function leaksOf(
	circuit: Circuit,
	grid: GridFactors,
	piece: Uint8Array,
	leak: number,
	loadSlope: Float64Array
): Float64Array {
	const { regulators: units, loads } = circuit;
	const leaks = new Float64Array(units.count).fill(leak);
	const firm = new Set<number>();
	for (let k = 0; k < units.count; k++) {
		if (!isFlat(piece[k])) firm.add(grid.part[units.outputNode[k]]);
	}
	const floating = Array.from(units.outputNode, (node) => !firm.has(grid.part[node]));
	if (leak > 0 || !floating.includes(true)) return leaks;
	const slopeOf = new Map<number, number>();
	const unitSlopeOf = new Map<number, number>();
	const add = (to: Map<number, number>, node: number, value: number) =>
		to.set(grid.part[node], (to.get(grid.part[node]) ?? 0) + Math.abs(value));
	loads.node.forEach((node, load) => add(slopeOf, node, loadSlope[load]));
	units.outputNode.forEach((node, k) => add(unitSlopeOf, node, 1 / units.outputOhm[k]));
	return leaks.map((_, k) => {
		if (!floating[k]) return 0;
		const part = grid.part[units.outputNode[k]];
		const ratio = (slopeOf.get(part) ?? 0) / (unitSlopeOf.get(part) ?? 1);
		if (ratio === 0) return FLOATING_LEAK;
		// A power of ten, so that the equations are kept while the loads' slopes move a little.
		return Math.min(FLOATING_LEAK, 10 ** Math.floor(Math.log10(BESIDE_LOADS * ratio)));
	});
}

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

function relativeOf(circuit: Circuit, evaluation: Evaluation): number {
	return evaluation.maxMismatchA / currentScale(circuit, evaluation);
}

function loopsWithin(evaluation: Evaluation, volts: number): boolean {
	return evaluation.senseMismatchV.every((left) => Math.abs(left) <= volts);
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
		const accepted =
			relativeOf(circuit, evaluation) <= Math.max(target, ACCEPTED_RELATIVE) &&
			loopsWithin(evaluation, LOOP_ACCEPTED_V);
		return finish(accepted ? 'converged' : 'stuck');
	};

	while (true) {
		const relative = relativeOf(circuit, evaluation);
		options.onStep?.(steps, relative);
		if (options.shouldStop?.() === true) return finish('stopped');
		if (relative <= target && loopsWithin(evaluation, LOOP_TARGET_V)) return finish('converged');
		const allowance = relative <= ACCEPTED_RELATIVE ? LAST_STEPS : 0;
		if (steps >= options.maxSteps + allowance) return finishAtBest();

		const leak = leaksOf(circuit, grid, piece, stageLeak, evaluation.loadSlope);
		const key = `${piece.join('')}|${loop.join('')}`;
		const fullKey = `${key}|${leak.join(',')}`;
		if (solver === null || solverKey !== fullKey) {
			solver = createPortSolver(circuit, grid, piece, leak, loop);
			if (solver === null) return finishAtBest();
			solverKey = fullKey;
		}
		const { powerless } = solver;
		const targets = loopTargets(circuit, unknowns, evaluation.senseErrorV, loop, powerless);
		const { step, iterations: inner } = solveLinearised(
			circuit,
			solver,
			evaluation,
			targets,
			relative,
			options.shouldStop
		);
		steps++;
		iterations += inner;

		const border = pivoting ? firstBorder(circuit, unknowns, step, piece, loop, stageLeak) : null;
		let t = border === null ? 1 : border.t;
		let trial = moved(unknowns, step, t);
		let next = evaluate(circuit, trial, stageLeak);
		// On a straight path the mismatch falls in proportion; there only bent loads can raise it, and
		// a loop that no unit follows, whose error may grow while its correction goes to the end.
		const loose = powerless.some((is, s) => is && loop[s] === LOOP_HOLDING);
		const allowed = () => {
			if (!pivoting) return (1 - SUFFICIENT * t) * evaluation.merit;
			return loose ? Infinity : evaluation.merit * (1 + 1e-9);
		};
		for (let h = 0; h < MAX_HALVINGS && t > 0 && next.merit > allowed(); h++) {
			t /= 2;
			trial = moved(unknowns, step, t);
			next = evaluate(circuit, trial, stageLeak);
		}
		if (!pivoting && next.merit > allowed()) {
			if (relative <= ACCEPTED_RELATIVE || options.onCycle === 'give-up') return finishAtBest();
			pivoting = true;
			continue;
		}
		const slow = next.merit > 0.5 * evaluation.merit;
		unknowns = trial;
		evaluation = next;
		if (!pivoting) {
			if (slow && relative <= ROUNDING_RELATIVE) return finishAtBest();
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
