import { and, eq, inArray, isNull } from 'drizzle-orm';
import type { z } from 'zod';
import type { AnchorInput, openThreadSchema, Thread } from '#lib/contracts/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { findItem, type Operation } from '#lib/floorplan/edits/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { comments, floorplans, revisions, threadActs, threads } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { Problem } from '../problem.ts';
import { placeUmOf } from './place.ts';
import { readThreads } from './thread-rows.ts';

/** What threads are about: the draft of a floorplan, or a revision. */
export type ThreadSubject =
	| { readonly kind: 'floorplan'; readonly id: string }
	| { readonly kind: 'revision'; readonly id: string };

type ThreadRow = typeof threads.$inferSelect;

/** The threads of a draft or of a revision, the newest first, resolved ones among them. */
export async function listThreads(
	db: Handle,
	actor: Actor,
	subject: ThreadSubject
): Promise<Thread[]> {
	await requireAccess(db, actor, 'project.view', subject);
	return readThreads(
		db,
		subject.kind === 'revision'
			? eq(threads.revisionId, subject.id)
			: and(eq(threads.floorplanId, subject.id), isNull(threads.revisionId))
	);
}

async function readThread(db: Handle, id: string): Promise<Thread> {
	const [thread] = await readThreads(db, eq(threads.id, id));
	return thread;
}

/** What a subject's threads are stored under, and the document that they are about. */
async function findSubject(
	db: Handle,
	{ kind, id }: ThreadSubject
): Promise<{ floorplanId: string; revisionId: string | null; document: Floorplan }> {
	if (kind === 'floorplan') {
		const [draft] = await db
			.select({ document: floorplans.document })
			.from(floorplans)
			.where(eq(floorplans.id, id));
		return { floorplanId: id, revisionId: null, document: draft.document };
	}
	const [revision] = await db
		.select({ floorplanId: revisions.floorplanId, document: revisions.document })
		.from(revisions)
		.where(eq(revisions.id, id));
	return { ...revision, revisionId: id };
}

/** An anchor as it is stored; refuses an object that is not there. */
function storedAnchor(anchor: AnchorInput, document: Floorplan) {
	switch (anchor.kind) {
		case 'plan':
			return { anchorKind: anchor.kind };
		case 'place':
			return { anchorKind: anchor.kind, xUm: anchor.xUm, yUm: anchor.yUm };
		case 'item': {
			const { list, id } = anchor;
			if (!findItem(document, list, id)) {
				const message = `There is no "${id}" in ${list} (expected an object of the plan, or its place).`;
				throw new Problem('invalid', `anchor.id: ${message}`, {
					errors: [{ path: 'anchor.id', message }]
				});
			}
			const place = placeUmOf(document, list, id);
			return {
				anchorKind: anchor.kind,
				itemList: list,
				itemId: id,
				xUm: place?.[0],
				yUm: place?.[1]
			};
		}
	}
}

/** Opens a thread with its first comment. */
export async function openThread(
	db: Handle,
	actor: Actor,
	subject: ThreadSubject,
	{ anchor, text }: z.output<typeof openThreadSchema>,
	at = new Date()
): Promise<Thread> {
	await requireAccess(db, actor, 'project.comment', subject);
	const id = await db.transaction(async (tx) => {
		const { floorplanId, revisionId, document } = await findSubject(tx, subject);
		const [thread] = await tx
			.insert(threads)
			.values({
				floorplanId,
				revisionId,
				...storedAnchor(anchor, document),
				openedBy: actor.userId,
				openedAt: at
			})
			.returning();
		await tx.insert(comments).values({ threadId: thread.id, text, userId: actor.userId, at });
		await tell(tx, actor, thread, 'thread.open');
		return thread.id;
	});
	return readThread(db, id);
}

/** Writes the audit trail and tells pages. */
async function tell(
	tx: Handle,
	actor: Actor,
	{ id, floorplanId, revisionId }: ThreadRow,
	action: string,
	detail: Record<string, unknown> = {}
): Promise<void> {
	await audit(tx, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action,
		objectKind: 'thread',
		objectId: id,
		detail: { floorplanId, revisionId, ...detail }
	});
	await publish(tx, { type: 'thread', floorplanId, id, revisionId });
}

/** Locks a thread that is known to exist, so that two acts on it take turns. */
async function lockThread(tx: Handle, id: string): Promise<ThreadRow> {
	const [thread] = await tx.select().from(threads).where(eq(threads.id, id)).for('update');
	return thread;
}

export async function addComment(
	db: Handle,
	actor: Actor,
	threadId: string,
	text: string,
	at = new Date()
): Promise<Thread> {
	await requireAccess(db, actor, 'project.comment', { kind: 'thread', id: threadId });
	await db.transaction(async (tx) => {
		const thread = await lockThread(tx, threadId);
		const [comment] = await tx
			.insert(comments)
			.values({ threadId, text, userId: actor.userId, at })
			.returning({ id: comments.id });
		await tell(tx, actor, thread, 'thread.comment', { commentId: comment.id });
	});
	return readThread(db, threadId);
}

/** Takes the words of one's own comment away; its place in the thread stays. */
export async function deleteComment(
	db: Handle,
	actor: Actor,
	threadId: string,
	commentId: string
): Promise<Thread> {
	await requireAccess(db, actor, 'project.comment', { kind: 'thread', id: threadId });
	await db.transaction(async (tx) => {
		const thread = await lockThread(tx, threadId);
		const written = await tx.select().from(comments).where(eq(comments.threadId, threadId));
		const comment = written.find(({ id }) => id === commentId);
		if (!comment) throw new Problem('not-found', 'There is no such comment in this thread.');
		if (comment.userId !== actor.userId) {
			throw new Problem('forbidden', 'Only the author of a comment deletes it. Answer it instead.');
		}
		if (comment.deletedAt) return;
		await tx
			.update(comments)
			.set({ text: '', deletedAt: new Date() })
			.where(eq(comments.id, commentId));
		await tell(tx, actor, thread, 'thread.delete-comment', { commentId });
	});
	return readThread(db, threadId);
}

/**
 * Resolves a thread or opens it again: whoever opened it, and those whose role says so. One that is
 * in that state already stays as it is.
 */
export async function settleThread(
	db: Handle,
	actor: Actor,
	threadId: string,
	act: 'resolve' | 'reopen',
	at = new Date()
): Promise<Thread> {
	const subject = { kind: 'thread', id: threadId } as const;
	await requireAccess(db, actor, 'project.comment', subject);
	const thread = await readThread(db, threadId);
	if (thread.openedBy.id !== actor.userId) {
		await requireAccess(db, actor, 'thread.resolve', subject);
	}
	await db.transaction(async (tx) => {
		const row = await lockThread(tx, threadId);
		const { isResolved } = await readThread(tx, threadId);
		if (isResolved === (act === 'resolve')) return;
		await tx.insert(threadActs).values({ threadId, act, userId: actor.userId, at });
		await tell(tx, actor, row, `thread.${act}`);
	});
	return readThread(db, threadId);
}

/**
 * Notes where objects stood that an edit is about to delete from a draft, so that their threads keep
 * their place. Called in the transaction of the edit.
 */
export async function keepPlaces(
	tx: Handle,
	floorplanId: string,
	before: Floorplan,
	operations: readonly Operation[]
): Promise<void> {
	const removed = operations.flatMap((operation) =>
		operation.op === 'remove' ? [{ list: operation.list, id: operation.item.id }] : []
	);
	if (removed.length === 0) return;
	const pinned = await tx
		.select()
		.from(threads)
		.where(
			and(
				eq(threads.floorplanId, floorplanId),
				isNull(threads.revisionId),
				inArray(
					threads.itemId,
					removed.map(({ id }) => id)
				)
			)
		);
	for (const { id, itemList, itemId } of pinned) {
		const isRemoved = removed.some((item) => item.list === itemList && item.id === itemId);
		if (!isRemoved || itemList === null || itemId === null) continue;
		const place = placeUmOf(before, itemList, itemId);
		if (!place) continue;
		await tx.update(threads).set({ xUm: place[0], yUm: place[1] }).where(eq(threads.id, id));
	}
}
