import { and, inArray, sql } from 'drizzle-orm';
import type { Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { UNFINISHED } from './job-rows.ts';

/** Gives back to the queue what workers hold under these ids; their late attempts store nothing. */
export async function returnJobs(db: Handle, queueIds: readonly string[]): Promise<void> {
	const ids = sql`${sql.param(queueIds)}::text[]`;
	const held = await db.execute<{ key: string }>(sql`
		select key from graphile_worker.jobs where locked_by = any(${ids}) and key is not null`);
	await db.execute(sql`select graphile_worker.force_unlock_workers(${ids})`);
	if (held.length === 0) return;
	const returned = await db
		.update(jobs)
		.set({ state: 'queued', phase: '', progress: 0 })
		.where(
			and(
				inArray(
					jobs.id,
					held.map(({ key }) => key)
				),
				inArray(jobs.state, ['running'])
			)
		)
		.returning({ id: jobs.id, floorplanId: jobs.floorplanId });
	await tell(db, returned);
}

/**
 * Fails the jobs that the queue has given up: each of their attempts ended with the death of the
 * worker, which leaves nobody to write it down.
 */
export async function failAbandoned(db: Handle): Promise<void> {
	const abandoned = await db
		.update(jobs)
		.set({
			state: 'failed',
			phase: '',
			progress: 0,
			finishedAt: new Date(),
			failure: {
				message:
					'The work was given up: each attempt ended with the death of the worker, most likely for want of memory. Make the plan smaller, or tell an administrator.',
				problems: []
			}
		})
		.where(
			and(
				inArray(jobs.state, UNFINISHED),
				sql`not exists (
					select 1 from graphile_worker.jobs entry
					where entry.key = ${jobs.id}::text
						and (entry.locked_at is not null or entry.attempts < entry.max_attempts)
				)`
			)
		)
		.returning({ id: jobs.id, floorplanId: jobs.floorplanId });
	await tell(db, abandoned);
}

async function tell(
	db: Handle,
	changed: readonly { id: string; floorplanId: string | null }[]
): Promise<void> {
	for (const { id, floorplanId } of changed) {
		if (floorplanId) await publish(db, { type: 'job', floorplanId, jobId: id });
	}
}
