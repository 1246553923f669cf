import { and, asc, count, desc, eq, gt, inArray, lt, lte, sql } from 'drizzle-orm';
import type { PersonName, RevisionMoveRecord, RevisionSummary } from '#lib/contracts/index.ts';
import type { Handle } from '../db/client.ts';
import {
	floorplanEdits,
	floorplans,
	results,
	revisionMoves,
	revisionResults,
	revisions,
	threads,
	users
} from '../db/schema/index.ts';
import { isOpenThread } from './thread-rows.ts';

/** A revision without its document. */
export type RevisionRow = Omit<typeof revisions.$inferSelect, 'document'>;

const rowColumns = {
	id: revisions.id,
	floorplanId: revisions.floorplanId,
	number: revisions.number,
	draftVersion: revisions.draftVersion,
	hash: revisions.hash,
	title: revisions.title,
	note: revisions.note,
	frozenBy: revisions.frozenBy,
	frozenAt: revisions.frozenAt
};

const combinations = sql<number>`jsonb_array_length(${revisions.document} -> 'modes') * jsonb_array_length(${revisions.document} -> 'corners')`;

/** A revision that is known to exist. */
export async function findRevision(db: Handle, id: string): Promise<RevisionRow> {
	const [row] = await db.select(rowColumns).from(revisions).where(eq(revisions.id, id));
	return row;
}

/** Moves of revisions by their ids, in the order in which they were made. */
export async function movesOf(
	db: Handle,
	revisionIds: readonly string[]
): Promise<Map<string, RevisionMoveRecord[]>> {
	const rows = await db
		.select({ move: revisionMoves, by: { id: users.id, name: users.name } })
		.from(revisionMoves)
		.innerJoin(users, eq(users.id, revisionMoves.userId))
		.where(inArray(revisionMoves.revisionId, [...revisionIds]))
		.orderBy(asc(revisionMoves.position));
	const moves = new Map<string, RevisionMoveRecord[]>(revisionIds.map((id) => [id, []]));
	for (const { move, by } of rows) {
		moves.get(move.revisionId)?.push({
			from: move.fromState,
			to: move.toState,
			by,
			at: move.at.toISOString(),
			note: move.note,
			hash: move.hash
		});
	}
	return moves;
}

/** What the results of revisions say, and how many of their threads are open. */
async function figuresOf(db: Handle, revisionIds: readonly string[]) {
	const readings = await db
		.select({
			revisionId: revisionResults.revisionId,
			solved: count(),
			worstDropV: sql<number | null>`max((${results.figures} ->> 'worstDropV')::float8)`,
			worstMarginV: sql<number | null>`min((${results.figures} ->> 'worstMarginV')::float8)`,
			findings: sql<number>`sum((${results.figures} ->> 'findings')::int)::int`
		})
		.from(revisionResults)
		.innerJoin(results, eq(results.id, revisionResults.resultId))
		.where(inArray(revisionResults.revisionId, [...revisionIds]))
		.groupBy(revisionResults.revisionId);
	const open = await db
		.select({ revisionId: threads.revisionId, threads: count() })
		.from(threads)
		.where(and(inArray(threads.revisionId, [...revisionIds]), isOpenThread))
		.groupBy(threads.revisionId);
	return {
		readings: new Map(readings.map(({ revisionId, ...reading }) => [revisionId, reading])),
		openThreads: new Map(open.map((row) => [row.revisionId, row.threads]))
	};
}

/** Revisions at a glance, the newest first: those of a floorplan, or one. */
export async function summariseRevisions(
	db: Handle,
	wanted: { readonly floorplanId: string } | { readonly revisionId: string }
): Promise<RevisionSummary[]> {
	const rows = await db
		.select({ row: rowColumns, combinations, frozenBy: { id: users.id, name: users.name } })
		.from(revisions)
		.innerJoin(users, eq(users.id, revisions.frozenBy))
		.where(
			'floorplanId' in wanted
				? eq(revisions.floorplanId, wanted.floorplanId)
				: eq(revisions.id, wanted.revisionId)
		)
		.orderBy(desc(revisions.number));
	const ids = rows.map(({ row }) => row.id);
	if (ids.length === 0) return [];
	const moves = await movesOf(db, ids);
	const { readings, openThreads } = await figuresOf(db, ids);
	return rows.map(({ row, combinations: wantedResults, frozenBy }) => {
		const lastMove = moves.get(row.id)?.at(-1);
		if (!lastMove) throw new Error(`revision ${row.id} has no move`);
		const reading = readings.get(row.id);
		return {
			...row,
			frozenBy,
			frozenAt: row.frozenAt.toISOString(),
			state: lastMove.to,
			lastMove,
			reading: {
				solved: reading?.solved ?? 0,
				combinations: wantedResults,
				worstDropV: reading?.worstDropV ?? null,
				worstMarginV: reading?.worstMarginV ?? null,
				findings: reading?.findings ?? 0
			},
			openThreads: openThreads.get(row.id) ?? 0
		};
	});
}

/**
 * Whose work a revision is: who froze it, and who edited the plan since the last revision before it
 * that was ever approved. Without one, whoever added the floorplan too: its first version is no edit.
 */
export async function authorsOf(db: Handle, revision: RevisionRow): Promise<PersonName[]> {
	const { floorplanId, number, draftVersion, frozenBy } = revision;
	const [approved] = await db
		.select({ draftVersion: revisions.draftVersion })
		.from(revisions)
		.innerJoin(
			revisionMoves,
			and(eq(revisionMoves.revisionId, revisions.id), eq(revisionMoves.toState, 'approved'))
		)
		.where(and(eq(revisions.floorplanId, floorplanId), lt(revisions.number, number)))
		.orderBy(desc(revisions.number))
		.limit(1);
	const editors = await db
		.selectDistinct({ userId: floorplanEdits.userId })
		.from(floorplanEdits)
		.where(
			and(
				eq(floorplanEdits.floorplanId, floorplanId),
				gt(floorplanEdits.toVersion, approved?.draftVersion ?? 0),
				lte(floorplanEdits.toVersion, draftVersion)
			)
		);
	const ids = new Set([frozenBy, ...editors.map(({ userId }) => userId)]);
	if (!approved) {
		const [floorplan] = await db
			.select({ createdBy: floorplans.createdBy })
			.from(floorplans)
			.where(eq(floorplans.id, floorplanId));
		ids.add(floorplan.createdBy);
	}
	return db
		.select({ id: users.id, name: users.name })
		.from(users)
		.where(inArray(users.id, [...ids]))
		.orderBy(asc(users.name));
}
