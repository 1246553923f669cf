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

/** True for the pieces on which the current follows no voltage. */
export function isFlat(piece: number): boolean {
	return piece === PIECE_LIMITED || piece === PIECE_IDLE || piece === PIECE_STARVED;
}

/** A current this small, as a part of maxA, does not tell on which side of a border a unit is. */
const BORDER_RESOLUTION = 1e-9;

/** What a unit's voltages ask for. */
export interface Drive {
	/** (set point - output) / outputOhm, A. */
	readonly wantedA: number;
	/** (input - output) / onOhm, A; Infinity for an ideal input. */
	readonly fullyOnA: number;
}

/** Wanted current between the bounds; beyond them a slope of `leak` times the regulating one. */
function heldCurrent(wantedA: number, maxA: number, sinkA: number, leak: number): number {
	if (wantedA <= -sinkA) return leak * (wantedA + sinkA) - sinkA;
	return wantedA < maxA ? wantedA : maxA + leak * (wantedA - maxA);
}

/**
 * The piece that holds.
 * @param leak slope of the flat pieces as a fraction of the sloped ones beside them: 0 is the law,
 * more than 0 a law without flat pieces on the way to it
 */
export function pieceOf(
	{ wantedA, fullyOnA }: Drive,
	maxA: number,
	sinkA: number,
	leak: number
): Piece {
	const passed = fullyOnA < 0 ? leak * fullyOnA : fullyOnA;
	if (passed < heldCurrent(wantedA, maxA, sinkA, leak)) {
		return fullyOnA <= 0 ? PIECE_STARVED : PIECE_DROPOUT;
	}
	if (wantedA <= -sinkA) return PIECE_IDLE;
	return wantedA < maxA ? PIECE_REGULATING : PIECE_LIMITED;
}

/** Current on a piece, A; `leak` as in `pieceOf`. */
export function currentOn(
	piece: number,
	{ wantedA, fullyOnA }: Drive,
	maxA: number,
	sinkA: number,
	leak: number
): number {
	switch (piece) {
		case PIECE_REGULATING:
			return wantedA;
		case PIECE_LIMITED:
			return maxA + leak * (wantedA - maxA);
		case PIECE_IDLE:
			// Plus 0: no negative zero for units that cannot sink.
			return leak * (wantedA + sinkA) - sinkA + 0;
		case PIECE_DROPOUT:
			return fullyOnA;
		default:
			return leak === 0 ? 0 : leak * fullyOnA;
	}
}

/**
 * Where along a straight path of the voltages a unit leaves its piece.
 * @returns the first t in [0, 1) from which on another piece holds, and that piece; or null
 */
export function nextPiece(
	piece: number,
	from: Drive,
	to: Drive,
	maxA: number,
	sinkA: number,
	leak: number
): { t: number; piece: Piece } | null {
	const wanted = { start: from.wantedA, slope: to.wantedA - from.wantedA };
	// An ideal input is Infinity at both ends: none of its borders is ever met.
	const ideal = !Number.isFinite(from.fullyOnA);
	const on = { start: from.fullyOnA, slope: ideal ? 0 : to.fullyOnA - from.fullyOnA };
	/** The straight parts of `heldCurrent`, and those of the fully-on current. */
	const held = [
		wanted,
		{ start: leak * (wanted.start + sinkA) - sinkA, slope: leak * wanted.slope },
		{ start: maxA + leak * (wanted.start - maxA), slope: leak * wanted.slope }
	];
	const passed = [on, { start: leak * on.start, slope: leak * on.slope }];
	const crossings = [
		(-sinkA - wanted.start) / wanted.slope,
		(maxA - wanted.start) / wanted.slope,
		...(ideal ? [] : [-on.start / on.slope]),
		...(ideal
			? []
			: held.flatMap((h) => passed.map((p) => (p.start - h.start) / (h.slope - p.slope))))
	].filter((t) => t > 0 && t < 1);
	// Between two crossings the piece is constant: look at the middle of each interval. One in which
	// next to nothing moves is the rounding of a start that lies on a border.
	const resolution = BORDER_RESOLUTION * maxA;
	const fastest = Math.max(Math.abs(wanted.slope), Math.abs(on.slope));
	const borders = [0, ...crossings.sort((a, b) => a - b), 1];
	for (let index = 0; index + 1 < borders.length; index++) {
		if (fastest * (borders[index + 1] - borders[index]) < resolution) continue;
		const middle = 0.5 * (borders[index] + borders[index + 1]);
		const drive = {
			wantedA: wanted.start + middle * wanted.slope,
			fullyOnA: ideal ? Infinity : on.start + middle * on.slope
		};
		const found = pieceOf(drive, maxA, sinkA, leak);
		if (found !== piece) return { t: borders[index], piece: found };
	}
	return null;
}
