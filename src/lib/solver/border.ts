import type { Circuit } from './circuit.ts';
import { moved, regulatorDrives, senseErrors, type Unknowns } from './evaluation.ts';
import type { Step } from './port-solver.ts';
import { nextPiece } from './regulator-law.ts';

/** Where a step meets the first border, and which unit's piece or loop's end changes there. */
export interface Border {
	readonly t: number;
	readonly list: 'piece' | 'loop';
	readonly index: number;
	readonly value: number;
}

/** A voltage this small does not tell on which side of its range's end a loop is. */
const BORDER_RESOLUTION_V = 1e-12;

/** The first change of a loop's end along a straight path of u + error, or null. */
function nextLoopEnd(
	start: number,
	slope: number,
	rangeV: number,
	loop: number
): { t: number; value: number } | null {
	const ends = [-rangeV, rangeV].map((end) => (end - start) / slope);
	const borders = [0, ...ends.filter((t) => t > 0 && t < 1).sort((a, b) => a - b), 1];
	for (let index = 0; index + 1 < borders.length; index++) {
		if (Math.abs(slope) * (borders[index + 1] - borders[index]) < BORDER_RESOLUTION_V) continue;
		const target = start + 0.5 * (borders[index] + borders[index + 1]) * slope;
		const value = target >= rangeV ? 1 : target <= -rangeV ? -1 : 0;
		if (value !== loop) return { t: borders[index], value };
	}
	return null;
}

/**
 * The first place along a step where a unit leaves its piece or a loop its end, with the change that
 * it makes there.
 * @param leak slope of the flat pieces, see `pieceOf`
 */
export function firstBorder(
	circuit: Circuit,
	from: Unknowns,
	step: Step,
	piece: Uint8Array,
	loop: Int8Array,
	leak: number
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
			leak
		);
		if (next !== null && (best === null || next.t < best.t)) {
			best = { t: next.t, list: 'piece', index: k, value: next.piece };
		}
	}
	const errorBefore = senseErrors(circuit, from.voltage);
	const errorAfter = senseErrors(circuit, to.voltage);
	for (let s = 0; s < circuit.senses.length; s++) {
		const start = from.correction[s] + errorBefore[s];
		const slope = to.correction[s] + errorAfter[s] - start;
		const next = nextLoopEnd(start, slope, circuit.senses[s].rangeV, loop[s]);
		if (next !== null && (best === null || next.t < best.t)) {
			best = { t: next.t, list: 'loop', index: s, value: next.value };
		}
	}
	return best;
}
