import { and, count, eq, inArray, sql } from 'drizzle-orm';
import type { Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { UNFINISHED, type JobRow } from './job-rows.ts';

/** The queue's one task: do the job of this id. */
export const TASK = 'manyweir-job';
/** Attempts before a job that fails for reasons of its surroundings is given up. */
export const MAX_ATTEMPTS = 4;
/** The queue counts priorities in 16 bits. */
const LAST_PRIORITY = 30_000;

export type NewJob = Pick<
	typeof jobs.$inferInsert,
	'kind' | 'input' | 'dedupeKey' | 'teamId' | 'floorplanId' | 'requestedBy'
>;

/**
 * Adds a job and its entry in the queue in the caller's transaction: both appear or neither does.
 * Where the same work is already waiting or running, that job is returned instead. The more
 * unfinished jobs a person has, the later their next one's turn comes, so that one person's hundred
 * jobs do not hold up another's single one.
 */
export async function enqueue(db: Handle, job: NewJob): Promise<JobRow> {
	const [{ unfinished }] = await db
		.select({ unfinished: count() })
		.from(jobs)
		.where(and(eq(jobs.requestedBy, job.requestedBy), inArray(jobs.state, UNFINISHED)));
	const [created] = await db
		.insert(jobs)
		.values(job)
		.onConflictDoNothing({
			target: jobs.dedupeKey,
			where: sql`${jobs.state} in ('queued', 'running')`
		})
		.returning();
	if (!created) {
		const [same] = await db
			.select()
			.from(jobs)
			.where(and(eq(jobs.dedupeKey, job.dedupeKey), inArray(jobs.state, UNFINISHED)));
		// It ended between the two statements: then there is room for a new one.
		return same ?? enqueue(db, job);
	}
	await addToQueue(db, created.id, Math.min(unfinished, LAST_PRIORITY));
	if (created.floorplanId) {
		await publish(db, { type: 'job', floorplanId: created.floorplanId, jobId: created.id });
	}
	return created;
}

/**
 * Puts a job into the queue, with all its attempts before it. An entry that a worker holds at the
 * moment is replaced and ends with that worker.
 *
 * @param priority lower comes first
 */
export async function addToQueue(db: Handle, jobId: string, priority: number): Promise<void> {
	const payload = JSON.stringify({ jobId });
	await db.execute(sql`select graphile_worker.add_job(
		${TASK}, ${payload}::json,
		max_attempts => ${MAX_ATTEMPTS}, job_key => ${jobId}, priority => ${priority}
	)`);
}
