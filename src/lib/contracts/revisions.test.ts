import { describe, expect, it } from 'vitest';
import {
	canMove,
	moveBetween,
	PLAN_STATES,
	REVISION_MOVES,
	REVISION_STATES,
	type RevisionMove
} from './revisions.ts';

/**
 * Every pair of states, written out by hand: rows are where a plan stands, columns where it would go,
 * both in the order of PLAN_STATES. Letters: f freeze, k ask, r return, a approve, s sign off,
 * o superseded; a dot is a move that there is not.
 */
const TABLE = [
	'. f . . . . .', // draft
	'. . k . . . o', // frozen
	'. . . r a . o', // in review
	'. . k . . . o', // returned
	'. . . . . s o', // approved
	'. . . . . . o', // signed off
	'. . . . . . .' // superseded
];
const LETTERS: Readonly<Record<RevisionMove, string>> = {
	freeze: 'f',
	ask: 'k',
	return: 'r',
	approve: 'a',
	'sign-off': 's',
	supersede: 'o'
};

describe('moves of a revision', () => {
	const pairs = PLAN_STATES.flatMap((from, row) =>
		PLAN_STATES.map((to, column) => ({ from, to, expected: TABLE[row].split(' ')[column] }))
	);

	it.each(pairs)('$from to $to: $expected', ({ from, to, expected }) => {
		const move = moveBetween(from, to);
		expect(move === null ? '.' : LETTERS[move]).toBe(expected);
		if (move) expect(canMove(from, move)).toBe(true);
	});

	it('never lead back to a draft, and never out of the last state', () => {
		const targets = Object.values(REVISION_MOVES).map(({ to }) => to as string);
		expect(targets).not.toContain('draft');
		for (const move of Object.keys(REVISION_MOVES) as RevisionMove[]) {
			expect(canMove('superseded', move), move).toBe(false);
		}
	});

	it('give a lead alone every decision', () => {
		const rights = Object.entries(REVISION_MOVES).map(([move, { right }]) => [move, right]);
		expect(Object.fromEntries(rights)).toEqual({
			freeze: 'revision.freeze',
			ask: 'revision.freeze',
			return: 'revision.decide',
			approve: 'revision.decide',
			'sign-off': 'revision.decide',
			supersede: null
		});
	});

	it('know every state but the draft as a state of a revision', () => {
		expect(['draft', ...REVISION_STATES]).toEqual(PLAN_STATES);
	});
});
