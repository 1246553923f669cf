import { and, count, eq, lt, sql } from 'drizzle-orm';
import { z } from 'zod';
import type { Job } from '#lib/contracts/index.ts';
import type { Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';

export type JobRow = typeof jobs.$inferSelect;

/** The fields of a solve's input that lists of jobs show; other kinds have none of them. */
const shownInputSchema = z
	.object({
		mode: z.string().nullable().default(null),
		corner: z.string().nullable().default(null),
		documentHash: z.string().nullable().default(null)
	})
	.catch({ mode: null, corner: null, documentHash: null });

/** A job as the API tells it. */
export function toJob(row: JobRow, ahead: number): Job {
	return {
		id: row.id,
		kind: row.kind,
		state: row.state,
		phase: row.phase,
		progress: row.progress,
		ahead,
		attempt: row.attempt,
		failure: row.failure,
		floorplanId: row.floorplanId,
		...shownInputSchema.parse(row.input),
		createdAt: row.createdAt.toISOString(),
		finishedAt: row.finishedAt?.toISOString() ?? null
	};
}

/** How many jobs were queued before this one and still wait. */
async function countAhead(db: Handle, row: JobRow): Promise<number> {
	if (row.state !== 'queued') return 0;
	const [{ waiting }] = await db
		.select({ waiting: count() })
		.from(jobs)
		.where(and(eq(jobs.state, 'queued'), lt(jobs.createdAt, row.createdAt)));
	return waiting;
}

export async function findJob(db: Handle, id: string): Promise<Job | null> {
	const [row] = await db.select().from(jobs).where(eq(jobs.id, id));
	return row ? toJob(row, await countAhead(db, row)) : null;
}

/** The jobs of a floorplan: all unfinished ones, and the newest finished one of each input. */
export async function listJobs(db: Handle, floorplanId: string): Promise<Job[]> {
	const rows = await db
		.selectDistinctOn([jobs.dedupeKey])
		.from(jobs)
		.where(eq(jobs.floorplanId, floorplanId))
		.orderBy(jobs.dedupeKey, sql`${jobs.createdAt} desc`);
	return Promise.all(rows.map(async (row) => toJob(row, await countAhead(db, row))));
}
