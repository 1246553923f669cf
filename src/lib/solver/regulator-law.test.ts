import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	currentOn,
	nextPiece,
	PIECE_DROPOUT,
	PIECE_IDLE,
	PIECE_LIMITED,
	PIECE_REGULATING,
	PIECE_STARVED,
	pieceOf,
	type Drive
} from './regulator-law.ts';

const MAX_A = 0.2;

/** The law as the model words it, without pieces. */
function lawInWords({ wantedA, fullyOnA }: Drive, sinkA: number): number {
	const held = Math.min(Math.max(wantedA, -sinkA), MAX_A);
	return Math.min(held, Math.max(0, fullyOnA));
}

function currentAt(drive: Drive, sinkA: number, leak: number): number {
	return currentOn(pieceOf(drive, MAX_A, sinkA, leak), drive, MAX_A, sinkA, leak);
}

const drives: fc.Arbitrary<Drive> = fc.record({
	wantedA: fc.double({ min: -1, max: 1, noNaN: true }),
	fullyOnA: fc.oneof(fc.double({ min: -1, max: 1, noNaN: true }), fc.constant(Infinity))
});

describe('pieceOf and currentOn', () => {
	it.each([
		[0.1, Infinity, 0, PIECE_REGULATING, 0.1],
		[0.3, Infinity, 0, PIECE_LIMITED, 0.2],
		[-0.1, Infinity, 0, PIECE_IDLE, 0],
		[-0.1, Infinity, 0.05, PIECE_IDLE, -0.05],
		[-0.02, 0.01, 0.05, PIECE_REGULATING, -0.02],
		[0.1, 0.04, 0, PIECE_DROPOUT, 0.04],
		[0.3, 0.15, 0, PIECE_DROPOUT, 0.15],
		[0.3, 0.25, 0, PIECE_LIMITED, 0.2],
		[0.1, -0.01, 0, PIECE_STARVED, 0],
		// Sinking needs no input.
		[-0.02, -0.01, 0.05, PIECE_REGULATING, -0.02]
	])('wanted %d A, fully on %d A, sinks %d A', (wantedA, fullyOnA, sinkA, piece, amps) => {
		const drive = { wantedA, fullyOnA };
		expect(pieceOf(drive, MAX_A, sinkA, 0)).toBe(piece);
		expect(currentOn(piece, drive, MAX_A, sinkA, 0)).toBe(amps);
	});

	it('is the law of the model everywhere', () => {
		fc.assert(
			fc.property(drives, fc.constantFrom(0, 0.05), (drive, sinkA) => {
				expect(currentAt(drive, sinkA, 0)).toBeCloseTo(lawInWords(drive, sinkA), 14);
			})
		);
	});

	it('with a leak it never falls when more is wanted or passed, and stays near the law', () => {
		fc.assert(
			fc.property(drives, fc.double({ min: 0, max: 0.5, noNaN: true }), (drive, more) => {
				const leak = 1e-3;
				const raised = {
					wantedA: drive.wantedA + more,
					fullyOnA: drive.fullyOnA + more
				};
				expect(currentAt(raised, 0.05, leak)).toBeGreaterThanOrEqual(currentAt(drive, 0.05, leak));
				expect(currentAt(drive, 0.05, leak)).toBeCloseTo(currentAt(drive, 0.05, 0), 2);
			})
		);
	});
});

describe('nextPiece', () => {
	const ideal = (wantedA: number): Drive => ({ wantedA, fullyOnA: Infinity });

	it.each([
		['to its limit', PIECE_REGULATING, ideal(0.1), ideal(0.3), 0.5, PIECE_LIMITED],
		['to its lower bound', PIECE_REGULATING, ideal(0.1), ideal(-0.1), 0.5, PIECE_IDLE],
		['back from idle', PIECE_IDLE, ideal(-0.3), ideal(0.1), 0.75, PIECE_REGULATING],
		[
			'out of headroom',
			PIECE_REGULATING,
			{ wantedA: 0.1, fullyOnA: 0.3 },
			{ wantedA: 0.1, fullyOnA: -0.1 },
			0.5,
			PIECE_DROPOUT
		],
		[
			'out of input',
			PIECE_DROPOUT,
			{ wantedA: 0.1, fullyOnA: 0.05 },
			{ wantedA: 0.1, fullyOnA: -0.05 },
			0.5,
			PIECE_STARVED
		]
	])('a unit goes %s', (_name, piece, from, to, t, next) => {
		const found = nextPiece(piece, from, to, MAX_A, 0, 0);
		expect(found?.t).toBeCloseTo(t, 12);
		expect(found?.piece).toBe(next);
	});

	it('is null where the piece holds to the end', () => {
		expect(nextPiece(PIECE_REGULATING, ideal(0.1), ideal(0.15), MAX_A, 0, 0)).toBeNull();
	});

	it('a piece that does not hold from the start is left at once', () => {
		const found = nextPiece(PIECE_REGULATING, ideal(0.3), ideal(0.4), MAX_A, 0, 0);
		expect(found).toEqual({ t: 0, piece: PIECE_LIMITED });
	});

	it('the rounding of a start on a border is not taken for a piece', () => {
		const start = -1e-15;
		expect(nextPiece(PIECE_REGULATING, ideal(start), ideal(0.1), MAX_A, 0, 0)).toBeNull();
	});
});
