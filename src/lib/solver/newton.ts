import type { Circuit } from './circuit.ts';
import {
	currentScale,
	evaluate,
	LOOP_HOLDING,
	regulatorDrives,
	senseErrors,
	type Evaluation,
	type Unknowns
} from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { solveLinearised } from './linearised.ts';
import { createPortSolver, LEAK_FRACTION, type PortSolver, type Step } from './port-solver.ts';
import { isFlat, nextPiece, PIECE_REGULATING } from './regulator-law.ts';

/** Where the iteration aims, and what it accepts where rounding stops it, relative to the load. */
export const TARGET_RELATIVE = 1e-12;
export const ACCEPTED_RELATIVE = 1e-7;
/** Below this, a step that does not halve the mismatch is the last. */
const ROUNDING_RELATIVE = 1e-10;
/** A loop is answered when this is left of its error, V. */
const LOOP_TOLERANCE_V = 1e-12;
const MAX_STEPS = 400;
/** Steps of the line search: down to 2^-12. */
const MAX_HALVINGS = 12;
/** A line-search step must take this part of what a full step promises. */
const SUFFICIENT = 1e-4;

export interface NewtonOptions {
	readonly onStep?: (step: number, relative: number) => void;
	readonly shouldStop?: () => boolean;
	/** Changes one piece at a time from the start (otherwise only where states come back). */
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
	readonly residual: number;
	/** Loops without a unit that follows them. */
	readonly powerless: readonly boolean[];
}

function moved({ voltage, correction }: Unknowns, step: Step, t: number): Unknowns {
	return {
		voltage: voltage.map((value, node) => value + t * step.voltage[node]),
		correction: correction.map((value, s) => value + t * step.correction[s])
	};
}

/** Leak of every unit: that of a connected part all of whose units are flat, else none. */
function leaksOf(circuit: Circuit, grid: GridFactors, piece: Uint8Array): Float64Array {
	const units = circuit.regulators;
	const firm = new Set<number>();
	for (let k = 0; k < units.count; k++) {
		if (!isFlat(piece[k])) firm.add(grid.part[units.outputNode[k]]);
	}
	return Float64Array.from(units.outputNode, (node) =>
		firm.has(grid.part[node]) ? 0 : LEAK_FRACTION
	);
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

/** Where a step meets the first border, and which unit's piece or loop's end changes there. */
interface Border {
	readonly t: number;
	readonly list: 'piece' | 'loop';
	readonly index: number;
	readonly value: number;
}

/**
 * The first place along a step where a unit leaves its piece or a loop its end, with the change it
 * makes (Katzenelson 1965: follow the straight path to the border, change that one piece, go on).
 */
function firstBorder(
	circuit: Circuit,
	from: Unknowns,
	step: Step,
	piece: Uint8Array,
	loop: Int8Array
): Border | null {
	const units = circuit.regulators;
	const to = moved(from, step, 1);
	const before = regulatorDrives(circuit, from);
	const after = regulatorDrives(circuit, to);
	let best: Border | null = null;
	for (let k = 0; k < units.count; k++) {
		const next = nextPiece(
			piece[k],
			{ wantedA: before.wantedA[k], fullyOnA: before.fullyOnA[k] },
			{ wantedA: after.wantedA[k], fullyOnA: after.fullyOnA[k] },
			units.maxA[k],
			units.sinkA[k],
			0
		);
		if (next !== null && (best === null || next.t < best.t)) {
			best = { t: next.t, list: 'piece', index: k, value: next.piece };
		}
	}
	const errorBefore = senseErrors(circuit, from.voltage);
	const errorAfter = senseErrors(circuit, to.voltage);
	circuit.senses.forEach(({ rangeV }, s) => {
		const start = from.correction[s] + errorBefore[s];
		const slope = to.correction[s] + errorAfter[s] - start;
		const ends = [-rangeV, rangeV].map((end) => (end - start) / slope);
		const borders = [0, ...ends.filter((t) => t > 0 && t < 1).sort((a, b) => a - b), 1];
		for (let index = 0; index + 1 < borders.length; index++) {
			const target = start + 0.5 * (borders[index] + borders[index + 1]) * slope;
			const found = target >= rangeV ? 1 : target <= -rangeV ? -1 : 0;
			if (found === loop[s]) continue;
			const t = borders[index];
			if (best === null || t < best.t) {
				best = { t, list: 'loop', index: s, value: found };
			}
			break;
		}
	});
	return best;
}

function signature(piece: Uint8Array, loop: Int8Array): string {
	return `${piece.join('')}|${loop.join('')}`;
}

/**
 * Semismooth Newton with the active set: the pieces that hold at the present voltages give an exact
 * Jacobian; a step that does not reduce the mismatch is halved. Where a set of pieces comes back, or
 * halving does not help, the iteration follows the straight path to the next border and changes one
 * piece at a time, which cannot cycle for laws of this kind (Fujisawa and Kuh 1972).
 */
export function solveNewton(
	circuit: Circuit,
	grid: GridFactors,
	start: Unknowns,
	options: NewtonOptions = {}
): NewtonResult {
	let unknowns = start;
	let evaluation = evaluate(circuit, unknowns);
	let best = { unknowns, evaluation };
	// Nominal volts lie on a border of the law; the first step takes every unit for regulating.
	let piece = new Uint8Array(circuit.regulators.count).fill(PIECE_REGULATING);
	let loop = Int8Array.from(evaluation.loop);
	const seen = new Set<string>();
	let pivoting = options.pivotOnly === true;
	let kept: { key: string; solver: PortSolver } | null = null;
	let powerless: readonly boolean[] = circuit.senses.map(() => false);
	let steps = 0;
	let iterations = 0;
	let residual = 0;
	let stalled = 0;

	const relativeOf = (at: Evaluation) => at.maxMismatchA / currentScale(circuit, at);
	const loopsAnswered = (at: Evaluation) =>
		at.senseMismatchV.every((volts) => Math.abs(volts) <= LOOP_TOLERANCE_V);
	const finish = (status: NewtonResult['status']): NewtonResult => {
		const at = status === 'converged' ? { unknowns, evaluation } : best;
		return {
			status,
			...at,
			relative: relativeOf(at.evaluation),
			steps,
			iterations,
			residual,
			powerless
		};
	};

	while (true) {
		const relative = relativeOf(evaluation);
		options.onStep?.(steps, relative);
		if (options.shouldStop?.() === true) return finish('stopped');
		const answered = loopsAnswered(evaluation);
		if (relative <= TARGET_RELATIVE && answered) return finish('converged');
		if (steps >= MAX_STEPS) return finish('stuck');

		const leak = leaksOf(circuit, grid, piece);
		const floating = leak.some((value) => value > 0);
		const key = `${signature(piece, loop)}|${floating ? leak.join(',') : ''}`;
		if (kept === null || kept.key !== key) {
			const solver =
				createPortSolver(circuit, grid, piece, leak, loop) ??
				createPortSolver(circuit, grid, piece, leak.fill(LEAK_FRACTION), loop);
			if (solver === null) return finish('stuck');
			kept = { key, solver };
		}
		powerless = kept.solver.powerless;
		const targets = loopTargets(circuit, unknowns, evaluation.senseErrorV, loop, powerless);
		const linear = solveLinearised(circuit, kept.solver, evaluation, targets, options.shouldStop);
		steps++;
		iterations += linear.iterations;
		residual = linear.residual;
		const { step } = linear;

		if (pivoting || floating) {
			const border = firstBorder(circuit, unknowns, step, piece, loop);
			let t = border === null ? 1 : border.t;
			let trial = moved(unknowns, step, t);
			let next = evaluate(circuit, trial);
			// Along a straight law the mismatch falls in proportion; only bent loads can raise it.
			let halved = false;
			for (
				let h = 0;
				h < MAX_HALVINGS && t > 0 && next.merit > evaluation.merit * (1 + 1e-9);
				h++
			) {
				t /= 2;
				halved = true;
				trial = moved(unknowns, step, t);
				next = evaluate(circuit, trial);
			}
			unknowns = trial;
			evaluation = next;
			if (!pivoting) {
				piece = Uint8Array.from(evaluation.piece);
				loop = Int8Array.from(evaluation.loop);
			}
			if (border !== null && !halved) {
				(border.list === 'piece' ? piece : loop)[border.index] = border.value;
			}
		} else {
			let t = 1;
			let trial = moved(unknowns, step, t);
			let next = evaluate(circuit, trial);
			for (let h = 0; h < MAX_HALVINGS; h++) {
				if (next.merit <= (1 - SUFFICIENT * t) * evaluation.merit) break;
				t /= 2;
				trial = moved(unknowns, step, t);
				next = evaluate(circuit, trial);
			}
			const reduced = next.merit <= (1 - SUFFICIENT * t) * evaluation.merit;
			if (!reduced) {
				// Rounding is all that is left, or the pieces stand in the way.
				if (relative <= ACCEPTED_RELATIVE && answered) return finish('converged');
				pivoting = true;
			} else {
				const slow = next.merit > 0.5 * evaluation.merit;
				unknowns = trial;
				evaluation = next;
				if (slow && relative <= ROUNDING_RELATIVE && answered) return finish('converged');
				const found = signature(evaluation.piece, evaluation.loop);
				if (found !== signature(piece, loop) && seen.has(found)) pivoting = true;
				seen.add(found);
				piece = Uint8Array.from(evaluation.piece);
				loop = Int8Array.from(evaluation.loop);
			}
		}
		if (evaluation.merit < 0.999 * best.evaluation.merit) {
			best = { unknowns, evaluation };
			stalled = 0;
		} else {
			stalled++;
		}
		if (pivoting && stalled > 4 * (circuit.regulators.count + 10)) {
			unknowns = best.unknowns;
			evaluation = best.evaluation;
			const reached = relativeOf(evaluation) <= ACCEPTED_RELATIVE && loopsAnswered(evaluation);
			return finish(reached ? 'converged' : 'stuck');
		}
	}
}
