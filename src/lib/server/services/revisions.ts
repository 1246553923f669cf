import { randomUUID } from 'node:crypto';
import { and, desc, eq, gt, lt } from 'drizzle-orm';
import type { z } from 'zod';
import type {
	EditAccepted,
	freezeSchema,
	RevisionDetail,
	RevisionSummary
} from '#lib/contracts/index.ts';
import { operationsBetween } from '#lib/floorplan/edits/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Database, Handle } from '../db/client.ts';
import {
	floorplans,
	projects,
	revisionMoves,
	revisionResults,
	revisions
} from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { bindResults } from '../jobs/bind-results.ts';
import { Problem } from '../problem.ts';
import { submitEdit } from './edits.ts';
import { blockersOf } from './review.ts';
import { combinationsOf, resultsOf } from './revision-results.ts';
import { authorsOf, findRevision, movesOf, summariseRevisions } from './revision-rows.ts';
import { enqueueMissing } from './solves.ts';

/** Steps that one edit may hold; see `editSchema`. */
const MOST_OPERATIONS = 20_000;

/**
 * Freezes the draft as its freezer saw it: the whole document under the next number, with the results
 * that are kept of it, and the solves that are missing. The same version frozen again is the revision
 * that there is already.
 *
 * @param at when it happened
 */
export async function freeze(
	db: Handle,
	actor: Actor,
	floorplanId: string,
	{ baseVersion, title, note }: z.output<typeof freezeSchema>,
	at = new Date()
): Promise<RevisionDetail> {
	const access = await requireAccess(db, actor, 'revision.freeze', {
		kind: 'floorplan',
		id: floorplanId
	});
	const projectId = access.projectId ?? '';
	const id = await db.transaction(async (tx) => {
		// Locks the draft: it cannot move on meanwhile, and two who freeze at once take turns.
		const [draft] = await tx
			.select()
			.from(floorplans)
			.where(eq(floorplans.id, floorplanId))
			.for('update');
		const { version, hash, document } = draft;
		if (version !== baseVersion) {
			throw new Problem(
				'conflict',
				`The draft is at version ${version}, you saw version ${baseVersion}. Look at what has changed, then freeze again.`,
				{ members: { version } }
			);
		}
		const [newest] = await tx
			.select({
				id: revisions.id,
				number: revisions.number,
				draftVersion: revisions.draftVersion
			})
			.from(revisions)
			.where(eq(revisions.floorplanId, floorplanId))
			.orderBy(desc(revisions.number))
			.limit(1);
		if (newest?.draftVersion === version) return newest.id;
		const number = (newest?.number ?? 0) + 1;
		const [created] = await tx
			.insert(revisions)
			.values({
				floorplanId,
				number,
				draftVersion: version,
				hash,
				document,
				title,
				note,
				frozenBy: actor.userId,
				frozenAt: at
			})
			.returning({ id: revisions.id });
		await tx.insert(revisionMoves).values({
			revisionId: created.id,
			position: 1,
			fromState: 'draft',
			toState: 'frozen',
			hash,
			note,
			userId: actor.userId,
			at
		});
		const solved = { projectId, floorplanId, hash, document };
		await enqueueMissing(tx, actor, solved, combinationsOf(document));
		// After the jobs: a worker that ends one waits for its turn to bind, not the other way round.
		await bindResults(tx, projectId, hash);
		await audit(tx, {
			teamId: actor.teamId,
			userId: actor.userId,
			requestId: actor.requestId,
			action: 'revision.freeze',
			objectKind: 'revision',
			objectId: created.id,
			detail: { floorplanId, number, hash }
		});
		await publish(tx, { type: 'revision', floorplanId, id: created.id, number, state: 'frozen' });
		return created.id;
	});
	return getRevision(db, actor, id);
}

/** The revisions of a floorplan, the newest first. */
export async function listRevisions(
	db: Handle,
	actor: Actor,
	floorplanId: string
): Promise<RevisionSummary[]> {
	await requireAccess(db, actor, 'project.view', { kind: 'floorplan', id: floorplanId });
	return summariseRevisions(db, { floorplanId });
}

/** The revision next to another in the line of a floorplan's revisions. */
async function neighbour(
	db: Handle,
	{ floorplanId, number }: RevisionSummary,
	side: 'previous' | 'next'
): Promise<{ id: string; number: number } | null> {
	const [row] = await db
		.select({ id: revisions.id, number: revisions.number })
		.from(revisions)
		.where(
			and(
				eq(revisions.floorplanId, floorplanId),
				(side === 'previous' ? lt : gt)(revisions.number, number)
			)
		)
		.orderBy(side === 'previous' ? desc(revisions.number) : revisions.number)
		.limit(1);
	return row ?? null;
}

export async function getRevision(db: Handle, actor: Actor, id: string): Promise<RevisionDetail> {
	const { role } = await requireAccess(db, actor, 'project.view', { kind: 'revision', id });
	const [summary] = await summariseRevisions(db, { revisionId: id });
	const [row] = await db
		.select({
			document: revisions.document,
			floorplanName: floorplans.name,
			projectId: projects.id,
			projectName: projects.name
		})
		.from(revisions)
		.innerJoin(floorplans, eq(floorplans.id, revisions.floorplanId))
		.innerJoin(projects, eq(projects.id, floorplans.projectId))
		.where(eq(revisions.id, id));
	const revision = await findRevision(db, id);
	const modes = await resultsOf(db, summary);
	const authors = await authorsOf(db, revision);
	return {
		...summary,
		...row,
		role: role ?? null,
		moves: (await movesOf(db, [id])).get(id) ?? [],
		results: modes,
		authors,
		blockers: blockersOf(actor, summary, modes, authors),
		previous: await neighbour(db, summary, 'previous'),
		next: await neighbour(db, summary, 'next')
	};
}

/** Starts the solves that a revision has no result of: failed, cancelled or never begun. */
export async function solveRevision(
	db: Database,
	actor: Actor,
	id: string
): Promise<RevisionDetail> {
	const access = await requireAccess(db, actor, 'solve.run', { kind: 'revision', id });
	const projectId = access.projectId ?? '';
	await db.transaction(async (tx) => {
		const [{ floorplanId, hash, document }] = await tx
			.select()
			.from(revisions)
			.where(eq(revisions.id, id));
		const bound = await tx
			.select({ mode: revisionResults.mode, corner: revisionResults.corner })
			.from(revisionResults)
			.where(eq(revisionResults.revisionId, id));
		const missing = combinationsOf(document).filter(
			({ mode, corner }) => !bound.some((one) => one.mode === mode && one.corner === corner)
		);
		await enqueueMissing(tx, actor, { projectId, floorplanId, hash, document }, missing);
		await bindResults(tx, projectId, hash);
	});
	return getRevision(db, actor, id);
}

/**
 * Starts the draft anew from a revision: one edit at the end of its history, so that nothing is lost
 * and an undo leads back. Refused where the draft has moved on since its asker saw it.
 */
export async function restoreRevision(
	db: Database,
	actor: Actor,
	id: string,
	baseVersion: number
): Promise<EditAccepted> {
	await requireAccess(db, actor, 'floorplan.draw', { kind: 'revision', id });
	const [revision] = await db.select().from(revisions).where(eq(revisions.id, id));
	const [draft] = await db.select().from(floorplans).where(eq(floorplans.id, revision.floorplanId));
	if (draft.version !== baseVersion) {
		throw new Problem(
			'conflict',
			`The draft is at version ${draft.version}, you saw version ${baseVersion}. Look at what has changed, then start anew.`,
			{ members: { version: draft.version } }
		);
	}
	const operations = operationsBetween(draft.document, revision.document);
	if (operations.length === 0) return { version: draft.version, hash: draft.hash };
	if (operations.length > MOST_OPERATIONS) {
		throw new Problem(
			'invalid',
			`The draft differs from revision ${revision.number} in ${operations.length} places (at most ${MOST_OPERATIONS} in one edit). Add the revision's file as a new floorplan instead.`
		);
	}
	const label = `Start anew from revision ${revision.number}`;
	const edit = { id: randomUUID(), label, baseVersion, operations };
	return submitEdit(db, actor, revision.floorplanId, edit);
}
