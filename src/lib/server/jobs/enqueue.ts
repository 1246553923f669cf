import { and, count, eq, inArray, sql } from 'drizzle-orm';
import type { Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import type { JobRow } from './job-rows.ts';

/** The queue's one task: do the job of this id. */
export const TASK = 'manyweir-job';
/** Attempts before a job that fails for reasons of its surroundings is given up. */
export const MAX_ATTEMPTS = 4;

const UNFINISHED = ['queued', 'running'] as const;

export type NewJob = Pick<
	typeof jobs.$inferInsert,
	'kind' | 'input' | 'dedupeKey' | 'teamId' | 'floorplanId' | 'requestedBy'
>;

/**
 * Adds a job and its entry in the queue in the caller's transaction: both appear or neither does.
 * Where the same work is already waiting or running, that job is returned instead. The more
 * unfinished jobs a team has, the later its next one's turn comes, so that one team's hundred jobs do
 * not hold up another's single one.
 */
export async function enqueue(db: Handle, job: NewJob): Promise<JobRow> {
	const [{ unfinished }] = await db
		.select({ unfinished: count() })
		.from(jobs)
		.where(and(eq(jobs.teamId, job.teamId), inArray(jobs.state, UNFINISHED)));
	const [created] = await db.insert(jobs).values(job).onConflictDoNothing().returning();
	if (!created) {
		const [same] = await db
			.select()
			.from(jobs)
			.where(and(eq(jobs.dedupeKey, job.dedupeKey), inArray(jobs.state, UNFINISHED)));
		// It ended between the two statements: then there is room for a new one.
		return same ?? enqueue(db, job);
	}
	const payload = JSON.stringify({ jobId: created.id });
	await db.execute(sql`select graphile_worker.add_job(
		${TASK}, ${payload}::json,
		max_attempts => ${MAX_ATTEMPTS}, job_key => ${created.id}, priority => ${Math.min(unfinished, 30_000)}
	)`);
	if (created.floorplanId) {
		await publish(db, { type: 'job', floorplanId: created.floorplanId, jobId: created.id });
	}
	return created;
}
