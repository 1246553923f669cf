import { asc, desc, eq, inArray, sql, type SQL } from 'drizzle-orm';
import type { Thread, ThreadAnchor, ThreadComment } from '#lib/contracts/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { findItem } from '#lib/floorplan/edits/index.ts';
import type { Handle } from '../db/client.ts';
import { comments, floorplans, revisions, threadActs, threads, users } from '../db/schema/index.ts';
import { placeUmOf } from './place.ts';

/** Threads whose last act did not resolve them. */
export const isOpenThread = sql`(
	select a.act from thread_acts a where a.thread_id = ${threads.id}
	order by a.id desc limit 1) is distinct from 'resolve'`;

type ThreadRow = typeof threads.$inferSelect;

/** What a thread is about, in the document as it stands now. */
function anchorOf(row: ThreadRow, document: Floorplan): ThreadAnchor {
	const stored: [number, number] | null =
		row.xUm === null || row.yUm === null ? null : [row.xUm, row.yUm];
	if (row.anchorKind === 'item' && row.itemList !== null && row.itemId !== null) {
		const { itemList: list, itemId: id } = row;
		const isPresent = findItem(document, list, id) !== undefined;
		const atUm = isPresent ? placeUmOf(document, list, id) : stored;
		return { kind: 'item', list, id, atUm, isPresent };
	}
	return row.anchorKind === 'place' && stored ? { kind: 'place', atUm: stored } : { kind: 'plan' };
}

async function commentsOf(
	db: Handle,
	threadIds: readonly string[]
): Promise<Map<string, ThreadComment[]>> {
	const rows = await db
		.select({ comment: comments, by: { id: users.id, name: users.name } })
		.from(comments)
		.innerJoin(users, eq(users.id, comments.userId))
		.where(inArray(comments.threadId, [...threadIds]))
		.orderBy(asc(comments.at), asc(comments.id));
	const written = new Map<string, ThreadComment[]>(threadIds.map((id) => [id, []]));
	for (const { comment, by } of rows) {
		written.get(comment.threadId)?.push({
			id: comment.id,
			by,
			at: comment.at.toISOString(),
			text: comment.deletedAt ? null : comment.text,
			deletedAt: comment.deletedAt?.toISOString() ?? null
		});
	}
	return written;
}

async function historyOf(
	db: Handle,
	threadIds: readonly string[]
): Promise<Map<string, Thread['history']>> {
	const rows = await db
		.select({ act: threadActs, by: { id: users.id, name: users.name } })
		.from(threadActs)
		.innerJoin(users, eq(users.id, threadActs.userId))
		.where(inArray(threadActs.threadId, [...threadIds]))
		.orderBy(asc(threadActs.id));
	const history = new Map<string, Thread['history']>(threadIds.map((id) => [id, []]));
	for (const { act, by } of rows) {
		history.get(act.threadId)?.push({ act: act.act, by, at: act.at.toISOString() });
	}
	return history;
}

/** The documents that threads are about, by revision id, or floorplan id for drafts. */
async function documentsOf(
	db: Handle,
	rows: readonly ThreadRow[]
): Promise<Map<string, Floorplan>> {
	const documents = new Map<string, Floorplan>();
	const revisionIds = rows.flatMap(({ revisionId }) => (revisionId === null ? [] : [revisionId]));
	if (revisionIds.length > 0) {
		const frozen = await db
			.select({ id: revisions.id, document: revisions.document })
			.from(revisions)
			.where(inArray(revisions.id, [...new Set(revisionIds)]));
		for (const { id, document } of frozen) documents.set(id, document);
	}
	const draftIds = rows.flatMap(({ revisionId, floorplanId }) =>
		revisionId === null ? [floorplanId] : []
	);
	if (draftIds.length > 0) {
		const drafts = await db
			.select({ id: floorplans.id, document: floorplans.document })
			.from(floorplans)
			.where(inArray(floorplans.id, [...new Set(draftIds)]));
		for (const { id, document } of drafts) documents.set(id, document);
	}
	return documents;
}

/** Threads with all that was written, the newest first. */
export async function readThreads(db: Handle, where: SQL | undefined): Promise<Thread[]> {
	const rows = await db
		.select({ thread: threads, openedBy: { id: users.id, name: users.name } })
		.from(threads)
		.innerJoin(users, eq(users.id, threads.openedBy))
		.where(where)
		.orderBy(desc(threads.openedAt), desc(threads.id));
	const ids = rows.map(({ thread }) => thread.id);
	if (ids.length === 0) return [];
	const documents = await documentsOf(
		db,
		rows.map(({ thread }) => thread)
	);
	const written = await commentsOf(db, ids);
	const histories = await historyOf(db, ids);
	return rows.map(({ thread, openedBy }) => {
		const document = documents.get(thread.revisionId ?? thread.floorplanId);
		if (!document) throw new Error(`thread ${thread.id} is about nothing`);
		const history = histories.get(thread.id) ?? [];
		return {
			id: thread.id,
			floorplanId: thread.floorplanId,
			revisionId: thread.revisionId,
			anchor: anchorOf(thread, document),
			openedBy,
			openedAt: thread.openedAt.toISOString(),
			isResolved: history.at(-1)?.act === 'resolve',
			history,
			comments: written.get(thread.id) ?? []
		};
	});
}
