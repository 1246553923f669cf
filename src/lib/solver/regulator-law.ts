/**
 * The law of one regulator: a slope of 1 / outputOhm around its set point, held between -sinkA and
 * maxA, and never more than the pass device fully on lets through. It is piecewise linear in the
 * voltages; a piece is one of its straight parts.
 */

/** (set point - output) / outputOhm. */
export const PIECE_REGULATING = 0;
/** Held at maxA. */
export const PIECE_LIMITED = 1;
/** Held at -sinkA. */
export const PIECE_IDLE = 2;
/** The pass device fully on: (input - output) / onOhm. */
export const PIECE_DROPOUT = 3;
/** Fully on with the input at or below the output: no current. */
export const PIECE_STARVED = 4;

export type Piece = 0 | 1 | 2 | 3 | 4;

/** True for the pieces whose current does not follow any voltage. */
export function isFlat(piece: number): boolean {
	return piece === PIECE_LIMITED || piece === PIECE_IDLE || piece === PIECE_STARVED;
}

/**
 * The piece that holds.
 * @param wantedA (set point - output) / outputOhm
 * @param fullyOnA (input - output) / onOhm, or Infinity for an ideal input
 */
export function pieceOf(wantedA: number, fullyOnA: number, maxA: number, sinkA: number): Piece {
	if (wantedA <= -sinkA) return PIECE_IDLE;
	if (wantedA <= 0) return PIECE_REGULATING;
	if (fullyOnA <= 0) return PIECE_STARVED;
	const heldA = Math.min(wantedA, maxA);
	if (fullyOnA < heldA) return PIECE_DROPOUT;
	return wantedA < maxA ? PIECE_REGULATING : PIECE_LIMITED;
}

/** Current on a piece, A. */
export function currentOn(
	piece: number,
	wantedA: number,
	fullyOnA: number,
	maxA: number,
	sinkA: number
): number {
	switch (piece) {
		case PIECE_REGULATING:
			return wantedA;
		case PIECE_LIMITED:
			return maxA;
		case PIECE_IDLE:
			return sinkA === 0 ? 0 : -sinkA;
		case PIECE_DROPOUT:
			return fullyOnA;
		default:
			return 0;
	}
}

/**
 * Where along a straight path of the voltages a unit leaves its piece.
 * @param from wanted and fully-on current at the start of the path
 * @param to the same at its end
 * @returns the first t in (after, 1] at which another piece begins, and that piece; or null
 */
export function nextPiece(
	piece: number,
	from: { wantedA: number; fullyOnA: number },
	to: { wantedA: number; fullyOnA: number },
	maxA: number,
	sinkA: number,
	after: number
): { t: number; piece: Piece } | null {
	const dWanted = to.wantedA - from.wantedA;
	// An ideal input is Infinity at both ends: no slope, and none of its borders is ever met.
	const dOn = Number.isFinite(from.fullyOnA) ? to.fullyOnA - from.fullyOnA : 0;
	const crossings = [
		(maxA - from.wantedA) / dWanted,
		(-sinkA - from.wantedA) / dWanted,
		-from.wantedA / dWanted,
		(maxA - from.fullyOnA) / dOn,
		-from.fullyOnA / dOn,
		(from.fullyOnA - from.wantedA) / (dWanted - dOn)
	].filter((t) => Number.isFinite(t) && t > after && t < 1);
	crossings.sort((a, b) => a - b);
	// Between two crossings the piece is constant: look at the middle of each interval.
	const borders = [after, ...crossings, 1];
	for (let index = 0; index + 1 < borders.length; index++) {
		const middle = 0.5 * (borders[index] + borders[index + 1]);
		const found = pieceOf(
			from.wantedA + middle * dWanted,
			dOn === 0 ? from.fullyOnA : from.fullyOnA + middle * dOn,
			maxA,
			sinkA
		);
		if (found !== piece) return { t: borders[index], piece: found };
	}
	return null;
}
