import { eq } from 'drizzle-orm';
import type { z } from 'zod';
import {
	canMove,
	REVISION_MOVES,
	type askReviewSchema,
	type Blocker,
	type decideSchema,
	type PersonName,
	type RevisionMove,
	type RevisionResult,
	type RevisionState,
	type RevisionSummary
} from '#lib/contracts/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { floorplans, revisionMoves } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { Problem } from '../problem.ts';
import { authorsOf, findRevision, summariseRevisions, type RevisionRow } from './revision-rows.ts';
import { resultsOf } from './revision-results.ts';

/** States in words, for sentences. */
const STATE_WORDS: Readonly<Record<RevisionState, string>> = {
	frozen: 'frozen, and its review was not asked for',
	'in-review': 'in review',
	returned: 'returned',
	approved: 'approved',
	'signed-off': 'signed off',
	superseded: 'superseded by a newer one'
};

function counted(count: number, one: string, many: string): string {
	return count === 1 ? `1 ${one}` : `${count} ${many}`;
}

function named(results: readonly RevisionResult[]): string {
	const [first, ...rest] = results.map(({ mode, corner }) => `${mode}, ${corner}`);
	return rest.length === 0 ? first : `${first} and ${rest.length} more`;
}

/** What stands against the approval of a revision by somebody, worst first. */
export function blockersOf(
	{ userId }: Pick<Actor, 'userId'>,
	{ number, state, reading }: RevisionSummary,
	results: readonly RevisionResult[],
	authors: readonly PersonName[]
): Blocker[] {
	const blockers: Blocker[] = [];
	if (!canMove(state, 'approve')) {
		const message = `Revision ${number} is ${STATE_WORDS[state]}.`;
		blockers.push({ code: 'not-in-review', message });
	}
	if (authors.some(({ id }) => id === userId)) {
		blockers.push({
			code: 'own-work',
			message:
				'You froze this revision, or worked on the plan since the last approved one. Somebody else has to decide on it.'
		});
	}
	const failed = results.filter(({ state: how }) => how === 'failed');
	if (failed.length > 0) {
		blockers.push({
			code: 'results-failed',
			message: `${counted(failed.length, 'solve', 'solves')} failed (${named(failed)}). Look at the reason, then solve again or return the revision.`
		});
	}
	const missing = results.filter(({ state: how }) => how === 'missing' || how === 'under-way');
	if (missing.length > 0) {
		blockers.push({
			code: 'results-missing',
			message: `${missing.length} of ${results.length} modes and corners have no result yet (${named(missing)}). Wait for them, or start them again.`
		});
	}
	if (reading.findings > 0) {
		blockers.push({
			code: 'findings-open',
			message: `${counted(reading.findings, 'finding is', 'findings are')} open. Return the revision, so that they are settled in a newer one.`
		});
	}
	return blockers;
}

interface Step {
	readonly move: RevisionMove;
	readonly actor: Actor;
	readonly note: string;
	readonly at: Date;
}

/** Writes a move down and tells of it; the caller has asked whether it may be made. */
async function writeMove(
	tx: Handle,
	{ id, floorplanId, number, hash }: RevisionRow,
	fromState: RevisionState,
	{ move, actor, note, at }: Step
): Promise<void> {
	const toState = REVISION_MOVES[move].to;
	const position = (await tx.$count(revisionMoves, eq(revisionMoves.revisionId, id))) + 1;
	await tx.insert(revisionMoves).values({
		revisionId: id,
		position,
		fromState,
		toState,
		hash,
		note,
		userId: actor.userId,
		at
	});
	await audit(tx, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action: `revision.${move}`,
		objectKind: 'revision',
		objectId: id,
		detail: { floorplanId, number, hash, note }
	});
	await publish(tx, { type: 'revision', floorplanId, id, number, state: toState });
}

/** Locks the line of a floorplan's revisions, so that two moves at once take turns. */
async function lockLine(tx: Handle, revisionId: string): Promise<RevisionRow> {
	const revision = await findRevision(tx, revisionId);
	await tx
		.select({ id: floorplans.id })
		.from(floorplans)
		.where(eq(floorplans.id, revision.floorplanId))
		.for('update');
	return revision;
}

function requireMove(summary: RevisionSummary, move: RevisionMove): void {
	if (canMove(summary.state, move)) return;
	const { number, state, lastMove } = summary;
	throw new Problem(
		'conflict',
		`Revision ${number} is ${STATE_WORDS[state]} (${lastMove.by.name}, ${lastMove.at}). From there this move cannot be made.`,
		{ members: { state } }
	);
}

/** Asks for the review of a revision. */
export async function askReview(
	db: Handle,
	actor: Actor,
	id: string,
	{ note }: z.output<typeof askReviewSchema>,
	at = new Date()
): Promise<void> {
	await requireAccess(db, actor, REVISION_MOVES.ask.right, { kind: 'revision', id });
	await db.transaction(async (tx) => {
		const revision = await lockLine(tx, id);
		const [summary] = await summariseRevisions(tx, { revisionId: id });
		requireMove(summary, 'ask');
		await writeMove(tx, revision, summary.state, { move: 'ask', actor, note, at });
	});
}

/**
 * Approves a revision or returns it. Decides a lead who had no part in the work, on exactly the
 * content that they saw; approves only what is solved throughout and breaks no limit. With an
 * approval the revisions before it are superseded, but for one that is signed off.
 */
export async function decide(
	db: Handle,
	actor: Actor,
	id: string,
	{ decision, hash, note }: z.output<typeof decideSchema>,
	at = new Date()
): Promise<void> {
	const rule = REVISION_MOVES[decision];
	await requireAccess(db, actor, rule.right, { kind: 'revision', id });
	if (rule.needsNote && note === '') {
		const message = 'Say what is asked for.';
		throw new Problem('invalid', `note: ${message}`, { errors: [{ path: 'note', message }] });
	}
	const refusal = await db.transaction(async (tx) => {
		const revision = await lockLine(tx, id);
		const [summary] = await summariseRevisions(tx, { revisionId: id });
		requireMove(summary, decision);
		if (hash !== revision.hash) {
			throw new Problem(
				'conflict',
				`hash: you looked at other content than revision ${revision.number} holds. Open it again and look at what it holds.`,
				{ errors: [{ path: 'hash', message: 'is not the hash of this revision' }] }
			);
		}
		const blockers = blockersOf(
			actor,
			summary,
			await resultsOf(tx, summary),
			await authorsOf(tx, revision)
		);
		const own = blockers.find(({ code }) => code === 'own-work');
		if (own) return new Problem('forbidden', own.message, { members: { blockers: [own] } });
		if (decision === 'approve' && blockers.length > 0) {
			throw new Problem('blocked', blockers[0].message, { members: { blockers } });
		}
		await writeMove(tx, revision, summary.state, { move: decision, actor, note, at });
		if (decision === 'approve') await supersedeBefore(tx, revision, actor, at);
		return null;
	});
	if (!refusal) return;
	await audit(db, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action: `revision.${decision}`,
		objectKind: 'revision',
		objectId: id,
		outcome: 'refused',
		detail: { reason: 'own work' }
	});
	throw refusal;
}

/** Takes the revisions before an approved one out of use. */
async function supersedeBefore(
	tx: Handle,
	{ floorplanId, number }: RevisionRow,
	actor: Actor,
	at: Date
): Promise<void> {
	const earlier = (await summariseRevisions(tx, { floorplanId })).filter(
		(one) => one.number < number
	);
	for (const { id, state } of earlier) {
		// What was signed off stays in force until something newer is signed off.
		if (state === 'signed-off' || !canMove(state, 'supersede')) continue;
		const note = `Revision ${number} was approved.`;
		const step = { move: 'supersede', actor, note, at } as const;
		await writeMove(tx, await findRevision(tx, id), state, step);
	}
}
