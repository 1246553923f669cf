import { and, desc, eq, sql } from 'drizzle-orm';
import { z } from 'zod';
import type { Job } from '#lib/contracts/index.ts';
import type { Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';

export type JobRow = typeof jobs.$inferSelect;

export const UNFINISHED = ['queued', 'running'] as const;

/** The fields of a solve's input that lists of jobs show; other kinds have none of them. */
const shownInputSchema = z
	.object({
		mode: z.string().nullable().default(null),
		corner: z.string().nullable().default(null),
		documentHash: z.string().nullable().default(null)
	})
	.catch({ mode: null, corner: null, documentHash: null });

/** How many jobs the queue will begin before this one; 0 for one that does not wait. */
const ahead = sql<number>`(
	select count(*)::int
	from graphile_worker.jobs mine
	join graphile_worker.jobs other
		on (other.priority, other.run_at, other.id) < (mine.priority, mine.run_at, mine.id)
	where "jobs"."state" = 'queued' and mine.key = "jobs"."id"::text
		and other.locked_at is null and other.attempts < other.max_attempts
)`;

/** A job as the API tells it. */
function toJob({ job, ahead: waiting }: { job: JobRow; ahead: number }): Job {
	return {
		id: job.id,
		kind: job.kind,
		state: job.state,
		phase: job.phase,
		progress: job.progress,
		ahead: waiting,
		attempt: job.attempt,
		failure: job.failure,
		floorplanId: job.floorplanId,
		...shownInputSchema.parse(job.input),
		createdAt: job.createdAt.toISOString(),
		finishedAt: job.finishedAt?.toISOString() ?? null
	};
}

export async function findJob(db: Handle, id: string): Promise<Job | null> {
	const [row] = await db.select({ job: jobs, ahead }).from(jobs).where(eq(jobs.id, id));
	return row ? toJob(row) : null;
}

/** The jobs of a floorplan: all unfinished ones, and the newest finished one of each kind, mode and corner. */
export async function listJobs(db: Handle, floorplanId: string): Promise<Job[]> {
	const alike = [
		sql`"jobs"."kind"`,
		sql`"jobs"."input" ->> 'mode'`,
		sql`"jobs"."input" ->> 'corner'`,
		sql`case when "jobs"."state" in ('queued', 'running') then "jobs"."id" end`
	];
	const rows = await db
		.selectDistinctOn(alike, { job: jobs, ahead })
		.from(jobs)
		.where(eq(jobs.floorplanId, floorplanId))
		.orderBy(...alike, desc(jobs.createdAt));
	return rows.map(toJob);
}

/** The newest job of each mode and corner that solves a document of a floorplan. */
export async function listSolves(
	db: Handle,
	floorplanId: string,
	documentHash: string
): Promise<Job[]> {
	const alike = [sql`"jobs"."input" ->> 'mode'`, sql`"jobs"."input" ->> 'corner'`];
	const rows = await db
		.selectDistinctOn(alike, { job: jobs, ahead })
		.from(jobs)
		.where(
			and(
				eq(jobs.floorplanId, floorplanId),
				eq(jobs.kind, 'solve'),
				eq(sql`${jobs.input} ->> 'documentHash'`, documentHash)
			)
		)
		.orderBy(...alike, desc(jobs.createdAt));
	return rows.map(toJob);
}
